import { chiSquareBeyond } from './chiSquare.ts'
import type { DateCheck } from './dateChecks.ts'
import type { DateLikelihood } from './dates.ts'
import { densityOf, normalDensity, studentModel } from './errorModel.ts'
import type { StepLaws } from './stepLaws.ts'

/** A constant offset of all radiocarbon dates against count and curve. */
export interface HardWater {
  /** Offset that fits best, 14C a, and the range within which the fit is nearly as good (log-likelihood down by 2). */
  offset: number
  range: [number, number]
  /** Gain in log-likelihood over no offset. */
  logGain: number
  /** Fit of the dates to the curve once the offset is taken off. */
  chiSquare: number
  degrees: number
  probability: number
  /** Constant positive offset with matching wiggles: old dissolved carbon in the lake's water (common practice, no source). */
  signature: boolean
}

/** Offsets tried, 14C a; finer about the best. */
const tried = { from: -400, to: 4000, step: 40, fine: 10 }
/** Placements of a floating count tried about the posterior, years younger and older: a curve's wiggle is wider than a step. */
const around = { younger: 4400, older: 800, step: 10 }
/** Bias tried, in prior SD: an anchored count has few other placements, a floating one many. */
const biasReach = 3
const biasSteps = { anchored: 0.5, floating: 1.5 }
/** A signature must gain this much, be larger than this, and leave a fit at least this probable. */
const least = { logGain: 4.5, offset: 40, probability: 0.05, dates: 3 }

/** One placement of the count on the calendar: x of every level is top + factor x counted years. */
interface Placement {
  top: number
  factor: number
  logPrior: number
}

/**
 * Looks for a hard-water effect: radiocarbon ages all too old by about the same amount, while their wiggles still follow the
 * curve. The count is laid down rigidly (its chance error widens each date's), at the fixed year of its top or wherever it
 * may float; known years hold it, and single outliers are left out. For each offset the likelihoods of all placements are summed.
 */
export function hardWater(
  counted: StepLaws,
  dates: readonly DateLikelihood[],
  checks: readonly DateCheck[],
  biasSd: number,
): HardWater | null {
  const carbon = carbonDates(dates, checks)
  if (carbon.length < least.dates) return null
  const placements = placementsOf(counted, dates, checks, biasSd)
  const score = (offset: number) => logLikelihood(counted, carbon, placements, offset)
  const { offsets, scores, best } = searched(score)
  const none = score(0)
  let low = best
  let high = best
  while (low > 0 && scores[low - 1] > scores[best] - 2) low--
  while (high < scores.length - 1 && scores[high + 1] > scores[best] - 2) high++
  const chiSquare = leastChiSquare(counted, carbon, placements, offsets[best])
  const degrees = Math.max(1, carbon.length - 2)
  const probability = chiSquareBeyond(chiSquare, degrees)
  const logGain = scores[best] - none
  const large = offsets[best] >= least.offset && offsets[low] > 0
  return {
    offset: offsets[best],
    range: [offsets[low], offsets[high]],
    logGain,
    chiSquare,
    degrees,
    probability,
    signature: large && logGain > least.logGain && probability > least.probability,
  }
}

/** Offsets in rising order with their scores, coarse far from the best and fine about it. */
function searched(score: (offset: number) => number): { offsets: number[]; scores: number[]; best: number } {
  const found = new Map<number, number>()
  const tryFrom = (from: number, to: number, step: number) => {
    for (let offset = from; offset <= to; offset += step) if (!found.has(offset)) found.set(offset, score(offset))
  }
  const bestOf = () => [...found].reduce((a, b) => (b[1] > a[1] ? b : a))[0]
  tryFrom(tried.from, tried.to, tried.step)
  const coarse = bestOf()
  tryFrom(coarse - 2 * tried.step, coarse + 2 * tried.step, tried.fine)
  const offsets = [...found.keys()].sort((a, b) => a - b)
  const scores = offsets.map((offset) => found.get(offset) ?? -Infinity)
  return { offsets, scores, best: offsets.indexOf(bestOf()) }
}

/** Radiocarbon dates without single outliers; where many are called outliers, it is what they share that is looked for. */
function carbonDates(dates: readonly DateLikelihood[], checks: readonly DateCheck[]): DateLikelihood[] {
  const all = dates.filter(({ kind }) => kind === 'c14')
  const sound = dates.filter(({ kind }, d) => kind === 'c14' && !(checks[d].outlierProbability > 0.5))
  return 3 * sound.length >= 2 * all.length ? sound : all
}

function placementsOf(
  counted: StepLaws,
  dates: readonly DateLikelihood[],
  checks: readonly DateCheck[],
  biasSd: number,
): Placement[] {
  const anchor = dates.find(({ fixed }) => fixed)
  const known = dates.filter(({ kind, fixed }) => kind === 'year' && !fixed)
  const factors: { factor: number; logPrior: number }[] = []
  const step = anchor ? biasSteps.anchored : biasSteps.floating
  for (let z = biasSd > 0 ? -biasReach : 0; z <= (biasSd > 0 ? biasReach : 0); z += step) {
    factors.push({ factor: Math.exp(biasSd * z), logPrior: -0.5 * z * z })
  }
  const placements: Placement[] = []
  for (const { factor, logPrior } of factors) {
    for (const top of topsOf(counted, factor, anchor, checks)) {
      let log = logPrior
      for (const date of known) {
        const x = top + factor * counted.mean[date.level]
        const lag = -date.from - date.expected[0]
        const sigma = Math.sqrt(Math.max(0.25, date.spread[0] ** 2) + counted.variance[date.level])
        log += Math.log(normalDensity(date.value + x + lag, sigma) + 1e-300)
      }
      placements.push({ top, factor, logPrior: log })
    }
  }
  return placements
}

/** x of level 0: given by the anchor, or on a grid about the place that the posterior of the first date gives it. */
function topsOf(
  counted: StepLaws,
  factor: number,
  anchor: DateLikelihood | undefined,
  checks: readonly DateCheck[],
): number[] {
  if (anchor) return [anchor.from - factor * counted.mean[anchor.level]]
  const { medianWith, level } = checks[0]
  const centre = -medianWith - factor * counted.mean[level]
  const tops: number[] = []
  for (let shift = -around.younger; shift <= around.older; shift += around.step) tops.push(centre + shift)
  return tops
}

const density = densityOf(studentModel)

function logLikelihood(
  counted: StepLaws,
  carbon: readonly DateLikelihood[],
  placements: readonly Placement[],
  offset: number,
): number {
  const logs = placements.map((placement) => {
    let log = placement.logPrior
    for (const date of carbon) {
      const { deviation, sigma } = against(counted, date, placement, offset)
      // A placement off the curve is not impossible for one date, but it is never the better for it.
      log += Math.log(Number.isNaN(deviation) ? 1e-12 : density(deviation, sigma))
    }
    return log
  })
  const most = logs.reduce((a, b) => Math.max(a, b), -Infinity)
  return most + Math.log(logs.reduce((sum, log) => sum + Math.exp(log - most), 0))
}

function leastChiSquare(
  counted: StepLaws,
  carbon: readonly DateLikelihood[],
  placements: readonly Placement[],
  offset: number,
): number {
  let smallest = Infinity
  for (const placement of placements) {
    let sum = 0
    for (const date of carbon) {
      const { deviation, sigma } = against(counted, date, placement, offset)
      sum += Number.isNaN(deviation) ? Infinity : (deviation / sigma) ** 2
    }
    smallest = Math.min(smallest, sum)
  }
  return smallest
}

/** A date less the offset against the curve where the placement puts its level; the curve's slope is taken as 1 14C a per a. */
function against(counted: StepLaws, date: DateLikelihood, { top, factor }: Placement, offset: number) {
  const i = Math.round(top + factor * counted.mean[date.level]) - date.from
  if (!(i >= 0 && i < date.expected.length)) return { deviation: NaN, sigma: NaN }
  const sigma = Math.sqrt(date.spread[i] ** 2 + counted.variance[date.level])
  return { deviation: date.value - offset - date.expected[i], sigma }
}
