import type { DateLikelihood } from './dates.ts'
import { mixtureModel, normalDensity } from './errorModel.ts'
import { hpdLevels, hpdRanges, yearFigures } from './hpd.ts'
import type { HpdRange } from './hpd.ts'

/** A distribution over x = -year = low ..., summing to 1. */
interface OverYears {
  low: number
  probability: Float64Array
}

/** One date against everything else. */
export interface DateCheck {
  id: string
  level: number
  fixed: boolean
  /** Of the level's year with all dates. */
  medianWith: number
  /** Of the level's year as count and all other dates have it; NaN and null where they say nothing. */
  medianWithout: number
  hpd95Without: HpdRange[] | null
  /** (measured - expected) / SD, where expectation and spread of a new measurement follow from count and other dates. */
  residual: number
  /** Posterior probability that the date's error is ten times as large as stated, before the fact 5 %. */
  outlierProbability: number
  /** Probability of the overlap: sum over years of min(calibrated alone, without it); 1: the same, 0: nothing in common. */
  overlap: number
  /** The date by itself over the years, in x; sums to 1. For drawing. */
  alone: OverYears
  /** What count and other dates say of its level, in x; empty where they say nothing. For drawing. */
  without: OverYears
}

/** An exactly known year still has an error to be compared with: half a year. */
const leastSigma = 0.5

export function checkDates(
  dates: readonly DateLikelihood[],
  cavities: readonly OverYears[],
  atDates: ReadonlyMap<number, OverYears>,
): DateCheck[] {
  return dates.map((date, d) => {
    const all = atDates.get(date.level)
    const medianWith = all ? -yearFigures(all.probability, all.low).median : NaN
    const alone = aloneOf(date)
    const known = { id: date.id, level: date.level, fixed: date.fixed, medianWith, alone, without: cavities[d] }
    const { low, probability } = cavities[d]
    if (probability.length === 0) {
      const nothing = { medianWithout: NaN, hpd95Without: null, residual: NaN, outlierProbability: NaN, overlap: NaN }
      return { ...known, ...nothing }
    }
    return {
      ...known,
      medianWithout: -yearFigures(probability, low).median,
      hpd95Without: hpdRanges(probability, low, hpdLevels[1])
        .map(({ from, to, probability: p }) => ({ from: -to, to: -from, probability: p }))
        .reverse(),
      residual: residualOf(date, cavities[d]),
      outlierProbability: outlierOf(date, cavities[d]),
      overlap: overlapOf(alone, cavities[d]),
    }
  })
}

/** The date calibrated by itself: its likelihood over the years of its table, without tails that hold less than 1e-6. */
function aloneOf(date: DateLikelihood): OverYears {
  let total = 0
  for (const one of date.density) total += one
  let first = 0
  let end = date.density.length
  for (let cut = date.density[0]; cut < 1e-6 * total; cut += date.density[first]) first++
  for (let cut = date.density[end - 1]; cut < 1e-6 * total; cut += date.density[end - 1]) end--
  const probability = date.density.slice(first, end)
  for (let k = 0; k < probability.length; k++) probability[k] /= total
  return { low: date.from + first, probability }
}

/** Walks the years that both the distribution and the date's table cover. */
function* yearsOf(date: DateLikelihood, { low, probability }: OverYears): Generator<[i: number, p: number]> {
  for (let k = 0; k < probability.length; k++) {
    const i = low + k - date.from
    if (i >= 0 && i < date.density.length && !Number.isNaN(date.expected[i])) yield [i, probability[k]]
  }
}

/**
 * The measurement against its prediction: mean and variance of mu(t) + error over the leave-one-out distribution of t. A
 * known year outside its own table is compared year with year.
 */
function residualOf(date: DateLikelihood, without: OverYears): number {
  if (date.kind === 'year') {
    const { mean, sd } = yearFigures(without.probability, without.low)
    const spread = Math.max(leastSigma, date.spread[0])
    // Expected values of a known year are -x less a constant, the mean lag of the sample's layers behind its level.
    const lag = -date.from - date.expected[0]
    return (date.value - (-mean - lag)) / Math.hypot(sd, spread)
  }
  let weight = 0
  let mean = 0
  for (const [i, p] of yearsOf(date, without)) {
    weight += p
    mean += p * date.expected[i]
  }
  if (!(weight > 0)) return NaN
  mean /= weight
  let variance = 0
  for (const [i, p] of yearsOf(date, without)) variance += p * ((date.expected[i] - mean) ** 2 + date.spread[i] ** 2)
  return (date.value - mean) / Math.sqrt(variance / weight)
}

/** Two components, as in the mixture model; exact for dates under that model, and the same question put to any other. */
function outlierOf(date: DateLikelihood, without: OverYears): number {
  const { prior, inflation } = mixtureModel
  let good = 0
  let bad = 0
  if (date.kind === 'year') {
    const spread = Math.max(leastSigma, date.spread[0])
    const lag = -date.from - date.expected[0]
    for (let k = 0; k < without.probability.length; k++) {
      const deviation = date.value + (without.low + k) + lag
      good += without.probability[k] * normalDensity(deviation, spread)
      bad += without.probability[k] * normalDensity(deviation, inflation * spread)
    }
  } else {
    for (const [i, p] of yearsOf(date, without)) {
      const deviation = date.value - date.expected[i]
      good += p * normalDensity(deviation, date.spread[i])
      bad += p * normalDensity(deviation, inflation * date.spread[i])
    }
  }
  // Both vanish only for a date so far off that no error of ten times its own explains it.
  return bad > 0 ? (prior * bad) / (prior * bad + (1 - prior) * good) : 1
}

function overlapOf(alone: OverYears, without: OverYears): number {
  let sum = 0
  for (let k = 0; k < without.probability.length; k++) {
    const i = without.low + k - alone.low
    if (i >= 0 && i < alone.probability.length) sum += Math.min(alone.probability[i], without.probability[k])
  }
  return sum
}
