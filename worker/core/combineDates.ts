import { checkPositive, Fault } from '../check.ts'
import { chiSquareBeyond } from './chiSquare.ts'

/** Several measurements of one thing, pooled. */
export interface Combined {
  value: number
  sigma: number
  /** Ward & Wilson's test statistic, its degrees of freedom and the probability of a larger one by chance. */
  t: number
  degrees: number
  probability: number
}

/**
 * Pools dates of the same object before calibration (Ward & Wilson 1978, Archaeometry 20, 19): weighted mean
 * sum(x / s^2) / sum(1 / s^2), error (sum 1 / s^2)^-1/2, T = sum((x - mean) / s)^2 with k - 1 degrees of freedom.
 */
export function combineDates(values: readonly number[], sigmas: readonly number[]): Combined {
  if (values.length < 2 || values.length !== sigmas.length) {
    const message = `pooling needs at least two values, each with its sigma; there are ${values.length} values and ${sigmas.length} sigmas`
    throw new Fault('argument', 'dates', values.length, message)
  }
  const weights = sigmas.map((sigma) => checkPositive('sigma', sigma) ** -2)
  const total = weights.reduce((a, b) => a + b, 0)
  const value = values.reduce((sum, x, i) => sum + x * weights[i], 0) / total
  const t = values.reduce((sum, x, i) => sum + (x - value) ** 2 * weights[i], 0)
  const degrees = values.length - 1
  return { value, sigma: total ** -0.5, t, degrees, probability: chiSquareBeyond(t, degrees) }
}
