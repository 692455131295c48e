import { checkInteger } from '../check.ts'

/** Figures of a thickness series, in the unit of the series; layers without a thickness of their own (NaN) are left out. */
export interface ThicknessSummary {
  layers: number
  mean: number
  /** Sample standard deviation, n - 1; NaN with one layer. */
  sd: number
  standardError: number
  /** SD / mean. */
  variation: number
  geometricMean: number
  /** Mean of |2 (x_i - x_(i-1)) / (x_i + x_(i-1))| over neighbouring years that both have a thickness (Douglass; from memory). */
  sensitivity: number
  median: number
  min: number
  max: number
}

/** Null where no layer has a thickness. */
export function thicknessSummary(thickness: Float64Array): ThicknessSummary | null {
  const known = thickness.filter((value) => !Number.isNaN(value)).sort()
  const n = known.length
  if (n === 0) return null
  const mean = known.reduce((sum, value) => sum + value, 0) / n
  const squares = known.reduce((sum, value) => sum + (value - mean) ** 2, 0)
  const sd = n > 1 ? Math.sqrt(squares / (n - 1)) : NaN
  return {
    layers: n,
    mean,
    sd,
    standardError: sd / Math.sqrt(n),
    variation: sd / mean,
    geometricMean: Math.exp(known.reduce((sum, value) => sum + Math.log(value), 0) / n),
    sensitivity: meanSensitivity(thickness),
    median: n % 2 ? known[(n - 1) / 2] : (known[n / 2 - 1] + known[n / 2]) / 2,
    min: known[0],
    max: known[n - 1],
  }
}

function meanSensitivity(thickness: Float64Array): number {
  let sum = 0
  let pairs = 0
  for (let i = 1; i < thickness.length; i++) {
    const change = Math.abs((2 * (thickness[i] - thickness[i - 1])) / (thickness[i] + thickness[i - 1]))
    if (Number.isNaN(change)) continue
    sum += change
    pairs++
  }
  return pairs > 0 ? sum / pairs : NaN
}

/** Centred running mean over a window of years, [layers]; NaN where fewer than half of the window has a thickness. */
export function runningMean(thickness: Float64Array, window: number): Float64Array {
  checkInteger('window', window, 1)
  const half = Math.floor(window / 2)
  return thickness.map((_, i) => {
    let sum = 0
    let known = 0
    for (let k = Math.max(0, i - half); k <= Math.min(thickness.length - 1, i + half); k++) {
      if (Number.isNaN(thickness[k])) continue
      sum += thickness[k]
      known++
    }
    return known >= window / 2 ? sum / known : NaN
  })
}
