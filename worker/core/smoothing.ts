import { checkInteger, checkPositive, checkSameLength, Fault } from '../check.ts'
import { atRow, finiteRuns, type PerRow, type Run } from './runs.ts'

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
 * Savitzky-Golay smoothing; the window, an odd number of rows, may change from row to row. The ends of every stretch follow
 * the polynomial of its first or last full window; a stretch between gaps that is shorter than the window is smoothed over
 * the longest odd window it holds, with a lower degree if need be. Gaps stay gaps (NaN).
 */
export function savitzkyGolay(column: Float64Array, length: PerRow, degree: number, derivative = 0): Float64Array {
  const smooth = new Float64Array(column.length).fill(NaN)
  const known = new Map<string, Float64Array>()
  for (const { from, to } of finiteRuns(column)) {
    const longest = to - from - ((to - from + 1) % 2)
    for (let row = from; row < to; row++) {
      const wanted = atRow(length, row)
      if (!Number.isInteger(wanted) || wanted < 1 || wanted % 2 === 0) {
        throw new Fault(
          'argument',
          'smoothing length',
          wanted,
          `the window of a Savitzky-Golay filter must be an odd number of rows; it is ${wanted}`,
        )
      }
      const window = Math.min(wanted, longest)
      const start = Math.max(from, Math.min(to - window, row - (window - 1) / 2))
      const at = row - start - (window - 1) / 2
      const key = `${window} ${at}`
      let weights = known.get(key)
      if (!weights) {
        weights = savitzkyGolayWeights(window, Math.min(degree, window - 1), at, derivative)
        known.set(key, weights)
      }
      let sum = 0
      for (let i = 0; i < window; i++) sum += weights[i] * column[start + i]
      smooth[row] = sum
    }
  }
  return smooth
}

/** Half a Gaussian, [radius + 1], for a standard deviation in rows; cut off at four standard deviations. */
export function gaussianHalf(sigma: number): Float64Array {
  const radius = Math.ceil(4 * sigma)
  return Float64Array.from({ length: radius + 1 }, (_, k) => Math.exp(-0.5 * (k / sigma) ** 2))
}

/** Ratio of neighbouring kernels where the standard deviation changes from row to row. */
const kernelRatio = 1.02

/**
 * Gaussian smoothing of columns of so many rows; the standard deviation, in rows, may change from row to row (it is then
 * rounded to 1 %). Never looks across a gap: each stretch is smoothed by itself, weights renormalised at its ends.
 */
export function gaussianSmoother(sigma: PerRow, rows: number): (column: Float64Array) => Float64Array {
  const kernels: Float64Array[] = []
  const kernelOf = new Int32Array(rows)
  const steps = new Map<number, number>()
  for (let row = 0; row < rows; row++) {
    const wanted = atRow(sigma, row)
    const step = typeof sigma === 'number' ? 0 : Math.round(Math.log(wanted) / Math.log(kernelRatio))
    let kernel = steps.get(step)
    if (kernel === undefined) {
      checkPositive('smoothing length', wanted)
      kernel = kernels.push(gaussianHalf(typeof sigma === 'number' ? sigma : kernelRatio ** step)) - 1
      steps.set(step, kernel)
    }
    kernelOf[row] = kernel
  }
  return (column) => {
    checkSameLength('column', column, rows)
    const smooth = new Float64Array(rows).fill(NaN)
    for (const run of finiteRuns(column)) smoothRun(column, run, kernels, kernelOf, smooth)
    return smooth
  }
}

function smoothRun(
  column: Float64Array,
  { from, to }: Run,
  kernels: Float64Array[],
  kernelOf: Int32Array,
  smooth: Float64Array,
): void {
  for (let row = from; row < to; row++) {
    const kernel = kernels[kernelOf[row]]
    const radius = kernel.length - 1
    const both = Math.min(radius, row - from, to - 1 - row)
    let sum = column[row]
    let weight = 1
    for (let k = 1; k <= both; k++) {
      sum += kernel[k] * (column[row - k] + column[row + k])
      weight += 2 * kernel[k]
    }
    for (let k = both + 1; k <= Math.min(radius, row - from); k++) {
      sum += kernel[k] * column[row - k]
      weight += kernel[k]
    }
    for (let k = both + 1; k <= Math.min(radius, to - 1 - row); k++) {
      sum += kernel[k] * column[row + k]
      weight += kernel[k]
    }
    smooth[row] = sum / weight
  }
}

/** Gaussian smoothing of one column: see gaussianSmoother. */
export function gaussianSmooth(column: Float64Array, sigma: PerRow): Float64Array {
  return gaussianSmoother(sigma, column.length)(column)
}
