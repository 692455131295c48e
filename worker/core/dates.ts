/**
 * Dates as the lattice takes them: the likelihood of a measurement as a function of the year in which its layer was laid
 * down. Inside, time runs downcore: x = -year, so that older is larger.
 */
import { checkAtLeast, checkFinite, checkPositive, Fault } from '../check.ts'
import { refuseBeyond } from './calibrate.ts'
import { ageErrorOfF14c, ageOfF14c } from './curve.ts'
import type { YearlyCurve } from './curve.ts'
import { densityOf, normalModel, studentModel } from './errorModel.ts'
import type { ErrorModel } from './errorModel.ts'
import type { SamplePlace } from './samplePlace.ts'

export const dateKinds = ['year', 'c14', 'f14c'] as const
export type DateKind = (typeof dateKinds)[number]

/** A dated sample or level of the core. */
export interface CoreDate {
  id: string
  /** `year`: astronomical calendar year; `c14`: conventional radiocarbon age before 1950; `f14c`: fraction modern. */
  kind: DateKind
  /** Depth range of the sample, mm; equal for a level. */
  top: number
  base: number
  /** In the unit of the kind, like the three that follow. */
  value: number
  /** Standard deviation. A `year` with sigma 0 is exact. With the shape `uniform`: half the width of the range. */
  sigma: number
  /** Subtracted from the value: reservoir or hard-water age. */
  offset: number
  offsetSigma: number
  /** Years only. */
  shape?: 'normal' | 'uniform'
  /** Without it: normal for years, Student-t (Christen & Perez 2009) for radiocarbon. */
  model?: ErrorModel
  /** Name of its calibration curve; without it the one chosen for the core. */
  curve?: string
}

/** The likelihood of a date over the years of its level; columns [years], entry i belongs to x = from + i (year = -x). */
export interface DateLikelihood {
  id: string
  kind: DateKind
  level: number
  from: number
  /** Density of the measurement. */
  density: Float64Array
  /** Its largest value. */
  most: number
  /** The value that would be measured without error if the layer were of that year; NaN where the curve says nothing. */
  expected: Float64Array
  /** Standard deviation of the difference between measured and expected value. */
  spread: Float64Array
  /** The measured value less its offset. */
  value: number
  /** Not to be left out: what ties the core down by decision, such as the coring year at an intact top. */
  fixed: boolean
}

/** How far out tables of normal and of heavy-tailed years reach, in standard deviations: densities below 1e-300 and 1e-14. */
const reach = { normal: 38, heavy: 300 }
/** No table of a known year is longer than this to either side. */
const furthestYears = 60_000

/** The default error model of a kind of date. */
export const defaultModel = (kind: DateKind): ErrorModel => (kind === 'year' ? normalModel : studentModel)

/** The likelihood of a date whose sample lies at a place in the core. */
export function dateLikelihood(date: CoreDate, place: SamplePlace, curve: YearlyCurve): DateLikelihood {
  const value = checkFinite(`value of ${date.id}`, date.value) - checkFinite(`offset of ${date.id}`, date.offset)
  checkAtLeast(`offset sigma of ${date.id}`, date.offsetSigma, 0)
  if (date.kind !== 'year') {
    checkPositive(`sigma of ${date.id}`, date.sigma)
    return radiocarbon(date, value, Math.hypot(date.sigma, date.offsetSigma), place, curve)
  }
  checkAtLeast(`sigma of ${date.id}`, date.sigma, 0)
  if (date.shape === 'uniform') return yearRange(date, value, date.sigma, place)
  const sigma = Math.hypot(date.sigma, date.offsetSigma)
  return sigma > 0 ? yearAbout(date, value, sigma, place) : yearRange(date, value, 0, place)
}

/** A level of exactly known year that is not in doubt: the anchor of the count. */
export function anchorYear(id: string, level: number, year: number): DateLikelihood {
  const place: SamplePlace = { level, older: Float64Array.of(0), share: Float64Array.of(1) }
  const date: CoreDate = { id, kind: 'year', top: 0, base: 0, value: year, sigma: 0, offset: 0, offsetSigma: 0 }
  return { ...yearRange(date, year, 0, place), fixed: true }
}

/** Mean number of years by which the sample is older than its level. */
function meanOlder({ older, share }: SamplePlace): number {
  let mean = 0
  for (let k = 0; k < older.length; k++) mean += share[k] * older[k]
  return mean
}

function yearAbout(date: CoreDate, value: number, sigma: number, place: SamplePlace): DateLikelihood {
  const model = date.model ?? defaultModel('year')
  const density = densityOf(model)
  const older = meanOlder(place)
  const out = Math.min(furthestYears, Math.ceil(sigma * (model.kind === 'normal' ? reach.normal : reach.heavy)))
  const from = Math.floor(-value - older) - out
  const expected = Float64Array.from({ length: 2 * out + 2 }, (_, i) => -(from + i) - older)
  return likelihood(date, value, place, from, {
    density: expected.map((year) => density(value - year, sigma)),
    expected,
    spread: expected.map(() => sigma),
  })
}

/** Years of one range alike; half-width 0 is one year. */
function yearRange(date: CoreDate, value: number, halfWidth: number, place: SamplePlace): DateLikelihood {
  const older = meanOlder(place)
  const from = halfWidth > 0 ? Math.ceil(-(value + halfWidth) - older) : Math.round(-value - older)
  const to = halfWidth > 0 ? Math.floor(-(value - halfWidth) - older) : from
  if (to < from) {
    const message = `the range ${value - halfWidth} to ${value + halfWidth} of ${date.id} holds no whole year`
    throw new Fault('argument', date.id, halfWidth, message)
  }
  const length = to - from + 1
  return likelihood(date, value, place, from, {
    density: new Float64Array(length).fill(1 / length),
    expected: Float64Array.from({ length }, (_, i) => -(from + i) - older),
    spread: new Float64Array(length).fill(halfWidth / Math.sqrt(3)),
  })
}

/** Radiocarbon against the mean of the curve over the sample's layers; years off the curve are refused (density 0). */
function radiocarbon(
  date: CoreDate,
  value: number,
  sigma: number,
  place: SamplePlace,
  curve: YearlyCurve,
): DateLikelihood {
  const quantity = date.kind === 'c14' ? 'age' : 'f14c'
  refuseBeyond({ quantity, value, sigma }, value, sigma, curve)
  const density = densityOf(date.model ?? defaultModel(date.kind))
  const { mu, curveSigma } = sampleCurve(quantity, place, curve)
  const spread = new Float64Array(mu.length)
  const densities = new Float64Array(mu.length)
  for (let i = 0; i < mu.length; i++) {
    spread[i] = Math.sqrt(sigma * sigma + curveSigma[i] * curveSigma[i])
    if (!Number.isNaN(mu[i])) densities[i] = density(value - mu[i], spread[i])
  }
  return likelihood(date, value, place, curve.from - 1950, { density: densities, expected: mu, spread })
}

/**
 * The curve averaged over the layers of a sample, by year of its middle level. Carbon mixes as F14C, so F14C is averaged;
 * neighbouring years of a curve share their error, so sigma is averaged too.
 */
function sampleCurve(
  quantity: 'age' | 'f14c',
  { older, share }: SamplePlace,
  curve: YearlyCurve,
): { mu: Float64Array; curveSigma: Float64Array } {
  const years = curve.age.length
  if (older.length === 1 && older[0] === 0) {
    return quantity === 'age'
      ? { mu: curve.age, curveSigma: curve.ageSigma }
      : { mu: curve.f14c, curveSigma: curve.f14cSigma }
  }
  const mu = new Float64Array(years)
  const curveSigma = new Float64Array(years)
  for (let k = 0; k < older.length; k++) {
    const whole = Math.floor(older[k])
    const part = older[k] - whole
    for (let i = 0; i < years; i++) {
      const at = i + whole
      const next = part > 0 ? at + 1 : at
      if (at < 0 || next >= years) {
        mu[i] = NaN
        continue
      }
      mu[i] += share[k] * (curve.f14c[at] + part * (curve.f14c[next] - curve.f14c[at]))
      curveSigma[i] += share[k] * (curve.f14cSigma[at] + part * (curve.f14cSigma[next] - curve.f14cSigma[at]))
    }
  }
  if (quantity === 'f14c') return { mu, curveSigma }
  return { mu: mu.map(ageOfF14c), curveSigma: curveSigma.map((s, i) => ageErrorOfF14c(mu[i], s)) }
}

function likelihood(
  date: CoreDate,
  value: number,
  place: SamplePlace,
  from: number,
  columns: Pick<DateLikelihood, 'density' | 'expected' | 'spread'>,
): DateLikelihood {
  const most = columns.density.reduce((a, b) => Math.max(a, b), 0)
  return { id: date.id, kind: date.kind, level: place.level, from, most, value, fixed: false, ...columns }
}

/** Density of a date at x; 0 outside its table. */
export function densityAt({ from, density }: DateLikelihood, x: number): number {
  const i = x - from
  return i >= 0 && i < density.length ? density[i] : 0
}

/** The x between which all but `cut` of a date's likelihood lies, each end taken alone. */
export function support({ from, density }: DateLikelihood, cut: number): { from: number; to: number } {
  let total = 0
  for (const one of density) total += one
  const least = total * cut
  let first = 0
  let last = density.length - 1
  for (let sum = density[first]; sum <= least && first < last; sum += density[first]) first++
  for (let sum = density[last]; sum <= least && last > first; sum += density[last]) last--
  return { from: from + first, to: from + last }
}
