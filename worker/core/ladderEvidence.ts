import type { Candidates } from './candidates.ts'
import { solve } from './cholesky.ts'

/**
 * What the looks of a candidate say: the log odds that it is a boundary between years and not something else (a second
 * lamina inside the year, grain, a scratch), by logistic regression on the features below. The regression is learned on the
 * core itself within EM: every candidate counts as a boundary by its present probability. Normal priors on the
 * coefficients say what holds before anything is learned, and keep a core with few false candidates from over-learning.
 */
export interface Evidence {
  /** Constant and one coefficient per feature, [1 + features]. */
  coefficients: Float64Array
}

/** Features of every candidate, row-major [candidates x features]; 0 is a usual year. */
export interface Features {
  count: number
  values: Float64Array
}

/**
 * The features, and mean and standard deviation of the prior of the coefficient of each. Means are round figures near what
 * regression on drawn cores of all types gives; deviations are wide enough for any one type.
 */
const features = ['log prominence', 'log edge strength', 'continuity', 'log width'] as const
export const featureCount = features.length
const priorMean = [4, 1.2, 3, 2, 1.5]
const priorDeviation = [1.2, 0.7, 1.2, 0.7, 0.7]
/** Looks alone never say more than this. */
const mostLogOdds = 6
/** Logs of features are bounded: beyond a twelfth or three times the usual nothing more is learned. */
const leastLog = -2.5
const mostLog = 1.1

/** Typical looks of a year's boundary: what features are measured against. */
export interface Reference {
  logProminence: number
  logEdge: number
  /** Width over local thickness. */
  logWidth: number
}

const logOf = (value: number, least: number) => Math.log(Math.max(value, least))
const bounded = (value: number) => (Number.isNaN(value) ? 0 : Math.max(leastLog, Math.min(mostLog, value)))

/** Before anything is believed: the middle of as many of the strongest candidates as there should be layers. */
export function firstReference(candidates: Candidates, width: Float64Array, layers: number): Reference {
  const middle = (column: Float64Array) => {
    const sorted = column.filter((value) => value > 0).sort()
    if (sorted.length === 0) return 0
    const strong = Math.max(1, Math.min(sorted.length, Math.round(layers)))
    return Math.log(sorted[sorted.length - 1 - Math.floor(strong / 2)])
  }
  return {
    logProminence: middle(candidates.prominence),
    logEdge: middle(candidates.edgeStrength),
    logWidth: middle(width),
  }
}

/** Mean looks of the candidates by their belief. */
export function referenceOf(
  candidates: Candidates,
  width: Float64Array,
  belief: Float64Array,
  before: Reference,
): Reference {
  let weight = 5
  let prominence = weight * before.logProminence
  let edge = weight * before.logEdge
  let breadth = weight * before.logWidth
  for (let i = 0; i < belief.length; i++) {
    if (!(candidates.prominence[i] > 0 && candidates.edgeStrength[i] > 0 && width[i] > 0)) continue
    weight += belief[i]
    prominence += belief[i] * Math.log(candidates.prominence[i])
    edge += belief[i] * Math.log(candidates.edgeStrength[i])
    breadth += belief[i] * Math.log(width[i])
  }
  return { logProminence: prominence / weight, logEdge: edge / weight, logWidth: breadth / weight }
}

export function featuresOf(candidates: Candidates, width: Float64Array, reference: Reference): Features {
  const count = candidates.position.length
  const values = new Float64Array(count * featureCount)
  for (let i = 0; i < count; i++) {
    const at = i * featureCount
    values[at] = bounded(logOf(candidates.prominence[i], 1e-3) - reference.logProminence)
    values[at + 1] = bounded(logOf(candidates.edgeStrength[i], 1e-3) - reference.logEdge)
    values[at + 2] = bounded(candidates.continuity[i] - 0.9)
    // A wide lamina is as good as a usual one; a narrow one is often grain that survived the smoothing.
    values[at + 3] = Math.min(0.5, bounded(logOf(width[i], 1e-3) - reference.logWidth))
  }
  return { count, values }
}

/** Evidence to start from: the prior's, with a constant of its own. */
export function startEvidence(constant: number): Evidence {
  return { coefficients: Float64Array.from(priorMean, (mean, k) => (k === 0 ? constant : mean)) }
}

/** Log density of the coefficients' prior, up to a constant. */
export function logPrior({ coefficients }: Evidence): number {
  let log = 0
  for (let k = 0; k < coefficients.length; k++) log -= 0.5 * ((coefficients[k] - priorMean[k]) / priorDeviation[k]) ** 2
  return log
}

/** Log odds of each candidate. */
export function logOddsOf({ count, values }: Features, { coefficients }: Evidence): Float64Array {
  const odds = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    let sum = coefficients[0]
    for (let f = 0; f < featureCount; f++) sum += coefficients[f + 1] * values[i * featureCount + f]
    odds[i] = Math.max(-mostLogOdds, Math.min(mostLogOdds, sum))
  }
  return odds
}

/** M-step: the most probable coefficients given the beliefs, by a few Newton steps from the present ones. */
export function learnEvidence({ count, values }: Features, belief: Float64Array, present: Evidence): Evidence {
  const size = featureCount + 1
  let coefficients = present.coefficients
  for (let step = 0; step < 4; step++) {
    const gradient = new Float64Array(size)
    const curvature = new Float64Array(size * size)
    for (let k = 0; k < size; k++) {
      const precision = 1 / priorDeviation[k] ** 2
      gradient[k] = -precision * (coefficients[k] - priorMean[k])
      curvature[k * size + k] = precision
    }
    const row = new Float64Array(size)
    row[0] = 1
    for (let i = 0; i < count; i++) {
      let sum = coefficients[0]
      for (let f = 0; f < featureCount; f++) {
        row[f + 1] = values[i * featureCount + f]
        sum += coefficients[f + 1] * row[f + 1]
      }
      const p = 1 / (1 + Math.exp(-sum))
      for (let k = 0; k < size; k++) {
        gradient[k] += (belief[i] - p) * row[k]
        for (let l = 0; l <= k; l++) curvature[k * size + l] += p * (1 - p) * row[k] * row[l]
      }
    }
    const change = solve(curvature, gradient)
    coefficients = coefficients.map((value, k) => value + change[k])
  }
  return { coefficients }
}
