import { chiSquareBeyond } from './chiSquare.ts'
import { solve } from './cholesky.ts'
import type { DateCheck } from './dateChecks.ts'
import type { DateLikelihood } from './dates.ts'
import type { StepLaws } from './stepLaws.ts'

/** A stretch between two dated levels: how many years more (or fewer) passed in it than the rest of the core lets expect. */
export interface StrayStretch {
  /** Ids of the dates above and below. */
  above: string
  below: string
  /** Levels of the chain. */
  from: number
  to: number
  countedYears: number
  /** Years missed by the count beyond the bias of the whole core; negative: counted too many. */
  missedYears: number
  missedSd: number
  /** Per hundred counted years. */
  missedPer100: number
  /** Probability of so large a deviation somewhere in the core by chance (Bonferroni over the stretches). */
  probability: number
  /** The deviation is out of line, and rests on more than one date on either side. */
  named: boolean
}

/** A dated level by itself: x = -year and its SD. */
interface Dated {
  id: string
  level: number
  x: number
  sd: number
  fixed: boolean
}

/** A deviation less probable than this by chance is named. */
const leastProbability = 0.05
/** Years of a calibrated date further from the leave-one-out age than this do not speak for the level's year. */
const nearby = { sds: 8, years: 400 }
/** The year of the top is free: an anchor is one more dated level, with next to no error. */
const freeVariance = 1e7

/**
 * For every pair of neighbouring dated levels: the generalised least-squares estimate of a step between them in
 *   x_d = top + N_d (1 + bias) + step [d below] + error,
 * N_d the counted years, bias shared with its prior SD, error of the date and of counting (which is carried downcore) beside it:
 * step = h' C^-1 r / h' C^-1 h, with variance 1 / h' C^-1 h (Aitken 1935). Outliers are left out.
 */
export function strayStretches(
  counted: StepLaws,
  dates: readonly DateLikelihood[],
  checks: readonly DateCheck[],
  biasSd: number,
): StrayStretch[] {
  const dated = datedLevels(dates, checks)
  const stretches: StrayStretch[] = []
  if (dated.length < 2) return []
  const covariance = covarianceOf(counted, dated, biasSd)
  const rest = Float64Array.from(
    dated,
    ({ x, level }) => x - dated[0].x - counted.mean[level] + counted.mean[dated[0].level],
  )
  for (let g = 0; g + 1 < dated.length; g++) {
    const [above, below] = [dated[g], dated[g + 1]]
    const years = counted.mean[below.level] - counted.mean[above.level]
    if (!(years > 0)) continue
    const step = Float64Array.from(dated, (_, d) => (d > g ? 1 : 0))
    const weighed = solve(covariance, step)
    const precision = dot(step, weighed)
    const missedYears = dot(weighed, rest) / precision
    const missedSd = Math.sqrt(1 / precision)
    const chance = chiSquareBeyond((missedYears / missedSd) ** 2, 1)
    const probability = Math.min(1, chance * (dated.length - 1))
    const settledAbove = g > 0 || above.fixed
    stretches.push({
      above: above.id,
      below: below.id,
      from: above.level,
      to: below.level,
      countedYears: years,
      missedYears,
      missedSd,
      missedPer100: (100 * missedYears) / years,
      probability,
      named: probability < leastProbability && settledAbove && g + 2 < dated.length,
    })
  }
  return stretches.sort((a, b) => a.probability - b.probability || a.from - b.from)
}

/** Dates that are no outliers, each by itself but near where the others expect it, sorted downcore. */
function datedLevels(dates: readonly DateLikelihood[], checks: readonly DateCheck[]): Dated[] {
  const dated: Dated[] = []
  for (const [d, { id, level, fixed }] of dates.entries()) {
    const check = checks[d]
    if (fixed) dated.push({ id, level, x: check.alone.low, sd: 0.3, fixed })
    else if (check.outlierProbability <= 0.5) dated.push({ id, level, fixed, ...nearOthers(check) })
  }
  return dated.sort((a, b) => a.level - b.level)
}

function nearOthers({ alone, without }: DateCheck): { x: number; sd: number } {
  const centre = moments(without.low, without.probability, () => true)
  const reach = Math.max(nearby.sds * centre.sd, nearby.years)
  const own = moments(alone.low, alone.probability, (x) => Math.abs(x - centre.x) <= reach)
  return { x: own.x, sd: Math.max(0.3, own.sd) }
}

function moments(low: number, probability: Float64Array, take: (x: number) => boolean): { x: number; sd: number } {
  let sum = 0
  let mean = 0
  let square = 0
  for (let k = 0; k < probability.length; k++) {
    if (!take(low + k)) continue
    sum += probability[k]
    mean += k * probability[k]
    square += k * k * probability[k]
  }
  mean /= sum
  return { x: low + mean, sd: Math.sqrt(Math.max(0, square / sum - mean * mean)) }
}

/** Covariance of the dated levels [dates x dates]: own error, counting error carried down, bias, and a free top. */
function covarianceOf({ mean, variance }: StepLaws, dated: readonly Dated[], biasSd: number): Float64Array {
  const n = dated.length
  const matrix = new Float64Array(n * n)
  const [origin, spread] = [mean[dated[0].level], variance[dated[0].level]]
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const upper = Math.min(dated[i].level, dated[j].level)
      const bias = biasSd * biasSd * (mean[dated[i].level] - origin) * (mean[dated[j].level] - origin)
      const own = i === j ? dated[i].sd ** 2 : 0
      matrix[i * n + j] = own + (variance[upper] - spread) + bias + freeVariance
    }
  }
  return matrix
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i]
  return sum
}
