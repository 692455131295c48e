import { checkPositive, checkWithin, Fault } from '../check.ts'
import { logGamma } from './incompleteBeta.ts'

/**
 * How a measurement scatters around its true value, beyond its stated error.
 * - `normal`: as the laboratory says.
 * - `student-t`: Christen & Perez 2009, Radiocarbon 51(3), 1047 (from memory): the stated error is itself uncertain, which
 *   gives a t with 2a degrees of freedom; their a = 3, b = 4.
 * - `mixture`: with probability `prior` the date is an outlier whose error is `inflation` times as large. Two components
 *   after Christen 1994, Applied Statistics 43, 489 (from memory); the two figures are our own defaults.
 */
export type ErrorModel =
  | { kind: 'normal' }
  | { kind: 'student-t'; a: number; b: number }
  | { kind: 'mixture'; prior: number; inflation: number }

export const normalModel: ErrorModel = { kind: 'normal' }
export const studentModel: ErrorModel = { kind: 'student-t', a: 3, b: 4 }
export const mixtureModel: ErrorModel & { kind: 'mixture' } = { kind: 'mixture', prior: 0.05, inflation: 10 }

/** Reads a model by its name, with its default figures. */
export function errorModelNamed(name: string): ErrorModel {
  if (name === 'normal') return normalModel
  if (name === 'student-t') return studentModel
  if (name === 'mixture') return mixtureModel
  throw new Fault(
    'argument',
    'model',
    name,
    `model must be normal, student-t or mixture; it is ${JSON.stringify(name)}`,
  )
}

/** Probability density of a deviation, given its standard error. */
export type Density = (deviation: number, sigma: number) => number

/** The density of a model as a function, its constants worked out once. */
export function densityOf(model: ErrorModel): Density {
  if (model.kind === 'normal') return normalDensity
  if (model.kind === 'mixture') {
    const prior = checkWithin('outlier prior', model.prior, 0, 1)
    const inflation = checkPositive('outlier inflation', model.inflation)
    return (d, s) => (1 - prior) * normalDensity(d, s) + prior * normalDensity(d, inflation * s)
  }
  const a = checkPositive('a of the t model', model.a)
  const b = checkPositive('b of the t model', model.b)
  // Gamma(a + 1/2) / (Gamma(a) sqrt(2 pi b) s) [1 + d^2 / (2 b s^2)]^-(a + 1/2)
  const factor = Math.exp(logGamma(a + 0.5) - logGamma(a)) / Math.sqrt(2 * Math.PI * b)
  if (a === 3) {
    // The published case, without the general power: it is evaluated for every year of the curve.
    return (d, s) => {
      const q = 1 + (d * d) / (2 * b * s * s)
      return factor / (s * q * q * q * Math.sqrt(q))
    }
  }
  return (d, s) => (factor / s) * (1 + (d * d) / (2 * b * s * s)) ** -(a + 0.5)
}

export function normalDensity(deviation: number, sigma: number): number {
  const z = deviation / sigma
  return Math.exp(-0.5 * z * z) / (sigma * Math.sqrt(2 * Math.PI))
}
