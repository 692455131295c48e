import { checkInteger, checkPositive } from '../check.ts'
import { atRow, finiteRuns, type PerRow } from './runs.ts'

/**
 * Weights of a Savitzky-Golay filter: the value (or derivative) at offset `at` of the polynomial of the given degree
 * fitted by least squares to samples at -half … half (Savitzky & Golay 1964, Anal. Chem. 36, 1627; ends after Gorry 1990).
 * The fit uses orthogonal polynomials on the samples, so that long windows stay accurate.
 * Returns [length] weights in sample order.
 */
export function savitzkyGolayWeights(length: number, degree: number, at = 0, derivative = 0): Float64Array {
  checkInteger('smoothing length', length, 1)
  checkInteger('smoothing degree', degree, 0, length - 1)
  const half = (length - 1) / 2
  const weights = new Float64Array(length)
  // Three-term recurrence p_(k+1) = t p_k - b_k p_(k-1) (Stieltjes); symmetry makes the linear term vanish.
  let previous = new Float64Array(length)
  let current = new Float64Array(length).fill(1)
  // Values at `at` of p_k and of its derivatives up to the one asked for: [derivative + 1].
  let previousAt = new Float64Array(derivative + 1)
  let currentAt = new Float64Array(derivative + 1)
  currentAt[0] = 1
  let previousNorm = 0
  for (let k = 0; k <= degree; k++) {
    let norm = 0
    for (const value of current) norm += value * value
    for (let i = 0; i < length; i++) weights[i] += (current[i] * currentAt[derivative]) / norm
    const b = previousNorm > 0 ? norm / previousNorm : 0
    const next = new Float64Array(length)
    for (let i = 0; i < length; i++) next[i] = (i - half) * current[i] - b * previous[i]
    const nextAt = new Float64Array(derivative + 1)
    for (let d = 0; d <= derivative; d++)
      nextAt[d] = at * currentAt[d] + (d > 0 ? d * currentAt[d - 1] : 0) - b * previousAt[d]
    previous = current
    current = next
    previousAt = currentAt
    currentAt = nextAt
    previousNorm = norm
  }
  return weights
}

/**
 * Savitzky-Golay smoothing over an odd window; the ends of every stretch follow the polynomial of its first or last full window.
 * A stretch between gaps that is shorter than the window is smoothed with the longest odd window it holds.
 */
export function savitzkyGolay(column: Float64Array, length: number, degree: number, derivative = 0): Float64Array {
  checkInteger('smoothing length', length, 1)
  if (length % 2 === 0) length++
  const smooth = new Float64Array(column.length).fill(NaN)
  for (const { from, to } of finiteRuns(column)) {
    const rows = to - from
    const window = Math.min(length, rows % 2 === 1 ? rows : rows - 1)
    if (window < 1) {
      smooth.set(column.subarray(from, to), from)
      continue
    }
    savitzkyGolayRun(
      column.subarray(from, to),
      smooth.subarray(from, to),
      window,
      Math.min(degree, window - 1),
      derivative,
    )
  }
  return smooth
}

function savitzkyGolayRun(
  run: Float64Array,
  out: Float64Array,
  window: number,
  degree: number,
  derivative: number,
): void {
  const half = (window - 1) / 2
  const apply = (weights: Float64Array, start: number) => {
    let sum = 0
    for (let i = 0; i < window; i++) sum += weights[i] * run[start + i]
    return sum
  }
  const centre = savitzkyGolayWeights(window, degree, 0, derivative)
  for (let row = half; row < run.length - half; row++) out[row] = apply(centre, row - half)
  for (let row = 0; row < Math.min(half, run.length); row++) {
    out[row] = apply(savitzkyGolayWeights(window, degree, row - half, derivative), 0)
  }
  for (let row = Math.max(half, run.length - half); row < run.length; row++) {
    const start = run.length - window
    out[row] = apply(savitzkyGolayWeights(window, degree, row - start - half, derivative), start)
  }
}

/** Half a Gaussian, [radius + 1], for a standard deviation in rows; cut off at four standard deviations. */
export function gaussianHalf(sigma: number): Float64Array {
  const radius = Math.ceil(4 * sigma)
  return Float64Array.from({ length: radius + 1 }, (_, k) => Math.exp(-0.5 * (k / sigma) ** 2))
}

/**
 * Gaussian smoothing; the standard deviation, in rows, may change from row to row (it is then rounded to 2 %).
 * Never looks across a gap: each stretch is smoothed by itself, weights renormalised at its ends.
 */
export function gaussianSmooth(column: Float64Array, sigma: PerRow): Float64Array {
  const smooth = new Float64Array(column.length).fill(NaN)
  const kernels = new Map<number, Float64Array>()
  const kernelAt = (row: number): Float64Array => {
    const wanted = checkPositive('smoothing length', atRow(sigma, row))
    const step = Math.round(Math.log(wanted) / Math.log(1.02))
    let kernel = kernels.get(step)
    if (!kernel) kernels.set(step, (kernel = gaussianHalf(typeof sigma === 'number' ? sigma : 1.02 ** step)))
    return kernel
  }
  for (const { from, to } of finiteRuns(column)) {
    for (let row = from; row < to; row++) {
      const kernel = kernelAt(row)
      const radius = kernel.length - 1
      let sum = column[row]
      let weight = 1
      const before = Math.min(radius, row - from)
      const after = Math.min(radius, to - 1 - row)
      for (let k = 1; k <= before; k++) {
        sum += kernel[k] * column[row - k]
        weight += kernel[k]
      }
      for (let k = 1; k <= after; k++) {
        sum += kernel[k] * column[row + k]
        weight += kernel[k]
      }
      smooth[row] = sum / weight
    }
  }
  return smooth
}
