/**
 * Rearranges values[from … to] (both included) so that the k-th smallest stands at k, nothing larger before it and nothing
 * smaller behind it (Hoare 1961, Algorithm 65 FIND, with the median of three as pivot). No NaN may be among them.
 */
export function quickselect(values: Float32Array, k: number, from: number, to: number): number {
  while (from < to) {
    const middle = (from + to) >> 1
    const a = values[from]
    const b = values[middle]
    const c = values[to]
    const pivot = a < b ? (b < c ? b : a < c ? c : a) : a < c ? a : b < c ? c : b
    let i = from
    let j = to
    while (i <= j) {
      while (values[i] < pivot) i++
      while (values[j] > pivot) j--
      if (i <= j) {
        const kept = values[i]
        values[i] = values[j]
        values[j] = kept
        i++
        j--
      }
    }
    if (k <= j) to = j
    else if (k >= i) from = i
    else break
  }
  return values[k]
}

/** Median of the first `count` values, which are rearranged; the mean of the two middle ones where they are even in number. */
export function medianOf(values: Float32Array, count: number): number {
  if (count === 0) return NaN
  const upper = quickselect(values, count >> 1, 0, count - 1)
  return count % 2 === 1 ? upper : (largestBelow(values, count >> 1) + upper) / 2
}

/** After a selection of the k-th smallest: the one before it in size. */
function largestBelow(values: Float32Array, k: number): number {
  let largest = values[0]
  for (let i = 1; i < k; i++) if (values[i] > largest) largest = values[i]
  return largest
}

const buckets = 256
/** Fewer values than this are selected from directly. */
const leastForBuckets = 48

/**
 * The same median for values between 0 and `most`, faster for long rows: values are counted in buckets of equal width,
 * and only the bucket that holds the middle is selected from.
 */
export function bucketMedian(most: number): (values: Float32Array, count: number) => number {
  const counts = new Uint32Array(buckets)
  const scale = (buckets - 1) / most
  return (values, count) => {
    if (count < leastForBuckets) return medianOf(values, count)
    counts.fill(0)
    for (let i = 0; i < count; i++) counts[(values[i] * scale) & (buckets - 1)]++
    // The bucket of the lower middle value, and how many values lie before that bucket.
    const middle = (count - 1) >> 1
    let bucket = 0
    let before = 0
    while (before + counts[bucket] <= middle) before += counts[bucket++]
    let held = 0
    let above = Infinity
    const alone = count % 2 === 1 || middle + 1 < before + counts[bucket]
    for (let i = 0; i < count; i++) {
      const value = values[i]
      const place = (value * scale) & (buckets - 1)
      if (place === bucket) values[held++] = value
      else if (!alone && place > bucket && value < above) above = value
    }
    const lower = quickselect(values, middle - before, 0, held - 1)
    if (count % 2 === 1) return lower
    return (lower + (alone ? quickselect(values, middle + 1 - before, middle + 1 - before, held - 1) : above)) / 2
  }
}

/** Mean of the first `count` values, which are rearranged, without a share of the smallest and the same share of the largest. */
export function trimmedMeanOf(values: Float32Array, count: number, share: number): number {
  if (count === 0) return NaN
  const cut = Math.floor(count * share)
  if (cut > 0) {
    quickselect(values, cut, 0, count - 1)
    quickselect(values, count - 1 - cut, cut, count - 1)
  }
  let sum = 0
  for (let i = cut; i < count - cut; i++) sum += values[i]
  return sum / (count - 2 * cut)
}
