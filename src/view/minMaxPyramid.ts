/**
 * The least and the greatest value of any stretch of a profile in logarithmic time, so that a profile of any length is
 * drawn with one line per screen row and no thin layer vanishes between rows. Built once per profile.
 */
export interface MinMaxPyramid {
  readonly values: Float64Array | Float32Array
  /** low[k][j] and high[k][j] cover values [j, j + 1) x 2^(k + 1), NaN ignored; NaN where there is no value. */
  readonly low: readonly Float32Array[]
  readonly high: readonly Float32Array[]
}

export function buildPyramid(values: Float64Array | Float32Array): MinMaxPyramid {
  const low: Float32Array[] = []
  const high: Float32Array[] = []
  let below: { low: ArrayLike<number>; high: ArrayLike<number> } = { low: values, high: values }
  while (below.low.length > 1) {
    const length = Math.ceil(below.low.length / 2)
    const nextLow = new Float32Array(length)
    const nextHigh = new Float32Array(length)
    for (let j = 0; j < length; j++) {
      const pair = Math.min(2 * j + 1, below.low.length - 1)
      nextLow[j] = least(below.low[2 * j], below.low[pair])
      nextHigh[j] = greatest(below.high[2 * j], below.high[pair])
    }
    low.push(nextLow)
    high.push(nextHigh)
    below = { low: nextLow, high: nextHigh }
  }
  return { values, low, high }
}

/** Least and greatest of values [from, to), clipped to what there is, written into `into`; NaN twice where there is none. */
export function rangeOf(pyramid: MinMaxPyramid, from: number, to: number, into: [number, number]): [number, number] {
  let start = Math.max(0, Math.floor(from))
  const end = Math.min(pyramid.values.length, Math.ceil(to))
  let min = NaN
  let max = NaN
  while (start < end) {
    // The largest block that begins here and ends within the stretch.
    let level = -1
    while (level + 1 < pyramid.low.length) {
      const size = 2 ** (level + 2)
      if (start % size !== 0 || start + size > end) break
      level++
    }
    if (level < 0) {
      min = least(min, pyramid.values[start])
      max = greatest(max, pyramid.values[start])
      start += 1
    } else {
      const size = 2 ** (level + 1)
      min = least(min, pyramid.low[level][start / size])
      max = greatest(max, pyramid.high[level][start / size])
      start += size
    }
  }
  into[0] = min
  into[1] = max
  return into
}

function least(a: number, b: number): number {
  return Number.isNaN(a) ? b : b < a ? b : a
}

function greatest(a: number, b: number): number {
  return Number.isNaN(a) ? b : b > a ? b : a
}
