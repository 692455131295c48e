/**
 * Rearranges values[from … to] (both included) so that the k-th smallest stands at k, nothing larger before it and nothing
 * smaller behind it (Hoare 1961, Algorithm 65 FIND, with the median of three as pivot). No NaN may be among them.
 */
export function quickselect(values: Float64Array, k: number, from: number, to: number): number {
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
export function medianOf(values: Float64Array, count: number): number {
  if (count === 0) return NaN
  const upper = quickselect(values, count >> 1, 0, count - 1)
  if (count % 2 === 1) return upper
  let lower = values[0]
  for (let i = 1; i < count >> 1; i++) if (values[i] > lower) lower = values[i]
  return (lower + upper) / 2
}

/** Mean of the first `count` values, which are rearranged, without a share of the smallest and the same share of the largest. */
export function trimmedMeanOf(values: Float64Array, count: number, share: number): number {
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
