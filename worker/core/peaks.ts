import { checkPositive, checkWithin } from '../check.ts'

export interface PeakRules {
  /** Least height of a peak. */
  height?: number
  /** Least distance between peaks, samples; of two that are closer the lower one falls, of two equally high the earlier. */
  distance?: number
  /** Least topographic prominence. */
  prominence?: number
  /** Least width, samples, at `relHeight` of the prominence below the summit. */
  width?: number
  relHeight?: number
}

/** Peaks sorted by index; every column [peaks]. */
export interface Peaks {
  /** Sample index of the summit; of a plateau its middle, rounded down. */
  index: Int32Array
  prominence: Float64Array
  /** Lowest sample to either side before a higher one, or the end, or a gap. */
  leftBase: Int32Array
  rightBase: Int32Array
  width: Float64Array
  /** Where the width is measured, in samples, by straight lines between them. */
  leftEdge: Float64Array
  rightEdge: Float64Array
}

/**
 * Local maxima, with their topographic prominence and width, in the order of rules height, distance, prominence, width.
 * A plateau counts as one peak unless it touches an end; the first and last sample are never peaks.
 * A gap (NaN) is neither peak nor base: samples next to it are no peaks, and it ends the search for a base like a higher sample.
 */
export function findPeaks(signal: Float64Array, rules: PeakRules = {}): Peaks {
  let index = localMaxima(signal)
  if (rules.height !== undefined) {
    const least = rules.height
    index = index.filter((peak) => signal[peak] >= least)
  }
  if (rules.distance !== undefined) {
    const distance = checkPositive('distance', rules.distance)
    const heights = Float64Array.from(index, (peak) => signal[peak])
    const kept = keepDistant(index, heights, () => distance)
    index = index.filter((_, i) => kept[i] === 1)
  }
  let peaks = measurePeaks(signal, index, rules.relHeight ?? 0.5)
  if (rules.prominence !== undefined) {
    const least = rules.prominence
    peaks = selectPeaks(peaks, (i) => peaks.prominence[i] >= least)
  }
  if (rules.width !== undefined) {
    const least = rules.width
    const all = peaks
    peaks = selectPeaks(all, (i) => all.width[i] >= least)
  }
  return peaks
}

/** The peaks for which `keep` holds. */
export function selectPeaks(peaks: Peaks, keep: (peak: number) => boolean): Peaks {
  const kept = [...peaks.index.keys()].filter(keep)
  const reals = (column: Float64Array) => Float64Array.from(kept, (i) => column[i])
  const whole = (column: Int32Array) => Int32Array.from(kept, (i) => column[i])
  return {
    index: whole(peaks.index),
    prominence: reals(peaks.prominence),
    leftBase: whole(peaks.leftBase),
    rightBase: whole(peaks.rightBase),
    width: reals(peaks.width),
    leftEdge: reals(peaks.leftEdge),
    rightEdge: reals(peaks.rightEdge),
  }
}

/** Samples higher than their neighbours; of a plateau the middle sample, rounded down. */
export function localMaxima(signal: Float64Array): Int32Array {
  const found: number[] = []
  let i = 1
  while (i < signal.length - 1) {
    if (signal[i - 1] < signal[i]) {
      let ahead = i + 1
      while (ahead < signal.length - 1 && signal[ahead] === signal[i]) ahead++
      if (signal[ahead] < signal[i]) {
        found.push((i + ahead - 1) >> 1)
        i = ahead
      }
    }
    i++
  }
  return Int32Array.from(found)
}

/**
 * Of peaks that stand closer than the distance asked for at the higher of them, keeps the one of higher priority,
 * beginning with the highest of all; of two equal ones the later. Returns 1 for each peak kept.
 */
export function keepDistant(
  index: ArrayLike<number>,
  priority: Float64Array,
  distanceAt: (peak: number) => number,
): Uint8Array {
  const kept = new Uint8Array(index.length).fill(1)
  const byPriority = Array.from(priority.keys()).sort((a, b) => priority[b] - priority[a] || b - a)
  for (const peak of byPriority) {
    if (kept[peak] === 0) continue
    const distance = distanceAt(peak)
    for (let k = peak - 1; k >= 0 && index[peak] - index[k] < distance; k--) kept[k] = 0
    for (let k = peak + 1; k < index.length && index[k] - index[peak] < distance; k++) kept[k] = 0
  }
  return kept
}

/** For each peak the lowest sample between it and the last higher one (or gap, or start): the base nearest to the peak. */
function lowestBefore(signal: Float64Array, index: Int32Array): Int32Array {
  const bases = new Int32Array(index.length)
  // Samples that no later one has reached yet, each with the lowest sample since the one below it on the stack.
  const height = new Float64Array(signal.length + 1)
  const lowest = new Int32Array(signal.length + 1)
  let depth = 0
  let next = 0
  for (let i = 0; i < signal.length && next < index.length; i++) {
    if (Number.isNaN(signal[i])) {
      depth = 0
      continue
    }
    let low = i
    while (depth > 0 && height[depth - 1] <= signal[i]) {
      depth--
      // Of equally low samples the one nearest to the peak is its base: an earlier one must be strictly lower.
      if (signal[lowest[depth]] < signal[low]) low = lowest[depth]
    }
    height[depth] = signal[i]
    lowest[depth] = low
    depth++
    if (i === index[next]) bases[next++] = low
  }
  return bases
}

/** Prominence, bases and width of peaks already found, in time proportional to the length of the signal. */
export function measurePeaks(signal: Float64Array, index: Int32Array, relHeight: number): Peaks {
  checkWithin('relHeight', relHeight, 0, 1)
  const last = signal.length - 1
  const leftBase = lowestBefore(signal, index)
  const mirrored = lowestBefore(signal.slice().reverse(), index.map((peak) => last - peak).reverse())
  const rightBase = mirrored.map((base) => last - base).reverse()
  const prominence = new Float64Array(index.length)
  const width = new Float64Array(index.length)
  const leftEdge = new Float64Array(index.length)
  const rightEdge = new Float64Array(index.length)
  for (let p = 0; p < index.length; p++) {
    const top = signal[index[p]]
    prominence[p] = top - Math.max(signal[leftBase[p]], signal[rightBase[p]])
    const level = top - prominence[p] * relHeight
    let left = index[p]
    while (leftBase[p] < left && level < signal[left]) left--
    leftEdge[p] = signal[left] < level ? left + (level - signal[left]) / (signal[left + 1] - signal[left]) : left
    let right = index[p]
    while (right < rightBase[p] && level < signal[right]) right++
    rightEdge[p] = signal[right] < level ? right - (level - signal[right]) / (signal[right - 1] - signal[right]) : right
    width[p] = rightEdge[p] - leftEdge[p]
  }
  return { index, prominence, leftBase, rightBase, width, leftEdge, rightEdge }
}

/**
 * Offset of the vertex of the parabola through three samples from the middle one, and its height:
 * d = (y- - y+) / (2 (y- - 2 y0 + y+)), y = y0 - (y- - y+) d / 4. A middle sample that is no summit gives d = 0.
 */
export function parabolaVertex(before: number, middle: number, after: number): { offset: number; height: number } {
  const curvature = before - 2 * middle + after
  if (!(curvature < 0)) return { offset: 0, height: middle }
  const offset = (before - after) / (2 * curvature)
  if (!(Math.abs(offset) <= 1)) return { offset: 0, height: middle }
  return { offset, height: middle - ((before - after) * offset) / 4 }
}
