import { checkAtLeast, checkFinite, checkPositive, Fault } from '../check.ts'
import type { YearlyCurve } from './curve.ts'
import { densityOf, normalModel } from './errorModel.ts'
import type { ErrorModel } from './errorModel.ts'
import { hpdLevels, hpdRanges, normalise, yearFigures } from './hpd.ts'
import type { HpdRange, YearFigures } from './hpd.ts'

/** One radiocarbon measurement; offset (reservoir age or hard-water age) is subtracted, errors in quadrature. */
export interface C14Measurement {
  /** `age`: conventional 14C age before 1950; `f14c`: fraction modern. */
  quantity: 'age' | 'f14c'
  value: number
  sigma: number
  /** In the unit of `value`; subtracted from it. */
  offset?: number
  offsetSigma?: number
  model?: ErrorModel
}

/** A calibrated date on whole years, cal BP; `probability[i]` belongs to `from + i` cal BP and sums to 1. */
export interface Calibration extends YearFigures {
  from: number
  probability: Float64Array
  hpd68: HpdRange[]
  hpd95: HpdRange[]
  /** The date runs beyond an end of the curve, where nothing is known: the ranges are cut there. */
  cutAt: 'young end' | 'old end' | null
}

/** A date whose density at the nearest point of the curve is this far down lies beyond the curve. */
const furthest = 6
/** Density at the last year of the curve, relative to the highest, from which on the result is called cut. */
const cutShare = 1e-3

/** The measurement less its offset: value - offset, sigma^2 + offsetSigma^2 (Stuiver & Polach 1977; for marine curves offset is Delta R). */
export function corrected(date: C14Measurement): { value: number; sigma: number } {
  const sigma = checkPositive('sigma', date.sigma)
  const offsetSigma = checkAtLeast('offset sigma', date.offsetSigma ?? 0, 0)
  return {
    value: checkFinite('value', date.value) - checkFinite('offset', date.offset ?? 0),
    sigma: Math.hypot(sigma, offsetSigma),
  }
}

/**
 * Calibrates one date with a flat prior over the years of the curve:
 * p(theta) proportional to the model's density of y - mu(theta) with the error sqrt(sigma^2 + sigma_c(theta)^2).
 */
export function calibrate(date: C14Measurement, curve: YearlyCurve): Calibration {
  const { value, sigma } = corrected(date)
  const [mu, curveSigma] = date.quantity === 'age' ? [curve.age, curve.ageSigma] : [curve.f14c, curve.f14cSigma]
  refuseBeyond(date, value, sigma, curve)
  const density = densityOf(date.model ?? normalModel)
  const whole = new Float64Array(mu.length)
  for (let i = 0; i < mu.length; i++) {
    whole[i] = density(value - mu[i], Math.sqrt(sigma * sigma + curveSigma[i] * curveSigma[i]))
  }
  const most = whole.reduce((a, b) => Math.max(a, b), 0)
  const last = whole.length - 1
  const cutAt = whole[0] > cutShare * most ? 'young end' : whole[last] > cutShare * most ? 'old end' : null
  normalise(whole)
  const { first, probability } = trimmed(whole)
  const from = curve.from + first
  return {
    from,
    probability,
    ...yearFigures(probability, from),
    hpd68: hpdRanges(probability, from, hpdLevels[0]),
    hpd95: hpdRanges(probability, from, hpdLevels[1]),
    cutAt,
  }
}

/** A date whose measurement lies outside every value of the curve cannot be calibrated with it. */
export function refuseBeyond(date: C14Measurement, value: number, sigma: number, curve: YearlyCurve): void {
  const [mu, curveSigma] = date.quantity === 'age' ? [curve.age, curve.ageSigma] : [curve.f14c, curve.f14cSigma]
  let nearest = Infinity
  for (let i = 0; i < mu.length; i++) {
    // Between two years the curve passes every value between theirs.
    const next = Math.min(i + 1, mu.length - 1)
    const outside = Math.max(0, Math.min(mu[i], mu[next]) - value, value - Math.max(mu[i], mu[next]))
    nearest = Math.min(nearest, (outside * outside) / (sigma * sigma + curveSigma[i] * curveSigma[i]))
    if (nearest <= furthest * furthest) return
  }
  const names = curve.sources.map(({ name }) => name).join(' with ')
  const what = date.quantity === 'age' ? `${value} ± ${sigma} 14C a` : `F14C ${value} ± ${sigma}`
  const end = `${curve.from} to ${curve.from + mu.length - 1} cal BP`
  const advice = isPostBomb(date, value) ? '; dates after 1950 need a post-bomb curve' : ''
  throw new Fault('argument', 'value', value, `${what} lies beyond the curve (${names}, ${end})${advice}`)
}

const isPostBomb = (date: C14Measurement, value: number) => (date.quantity === 'age' ? value < 0 : value > 1)

/** Leaves out the tails that hold less than 1e-12 altogether, and makes the rest sum to 1. */
function trimmed(whole: Float64Array): { first: number; probability: Float64Array } {
  const least = 5e-13
  let first = 0
  let end = whole.length
  for (let sum = whole[first]; sum < least; sum += whole[first]) first++
  for (let sum = whole[end - 1]; sum < least; sum += whole[end - 1]) end--
  const probability = whole.slice(first, end)
  normalise(probability)
  return { first, probability }
}
