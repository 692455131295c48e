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

/** Columns of every candidate, row-major [candidates x features]. */
export interface Columns {
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
/** Layers over which the usual looks are remembered, and layers that the core's mean is worth. */
const referenceMemory = 15
const referencePrior = 5

const logOf = (value: number, least: number) => Math.log(Math.max(value, least))
const bounded = (value: number) => (Number.isNaN(value) ? 0 : Math.max(leastLog, Math.min(mostLog, value)))

/** The looks of the candidates as they are; widths against the local thickness `median` [candidates]. */
export function looksOf(candidates: Candidates, median: Float64Array): Columns {
  const count = candidates.position.length
  const values = new Float64Array(count * featureCount)
  for (let i = 0; i < count; i++) {
    const at = i * featureCount
    values[at] = logOf(candidates.prominence[i], 1e-3)
    values[at + 1] = logOf(candidates.edgeStrength[i], 1e-3)
    values[at + 2] = Number.isNaN(candidates.continuity[i]) ? 1 : candidates.continuity[i]
    values[at + 3] = logOf(candidates.width[i] / median[i], 1e-3)
  }
  return { count, values }
}

/** The usual looks before anything is believed: the middle of as many of the strongest candidates as there should be layers. */
export function firstReference({ count, values }: Columns, layers: number): Columns {
  const reference = new Float64Array(count * featureCount)
  for (let f = 0; f < featureCount; f++) {
    const sorted = Float64Array.from({ length: count }, (_, i) => values[i * featureCount + f]).sort()
    const strong = Math.max(1, Math.min(count, Math.round(layers)))
    const middle = count > 0 ? sorted[count - 1 - Math.floor(strong / 2)] : 0
    for (let i = 0; i < count; i++) reference[i * featureCount + f] = middle
  }
  return { count, values: reference }
}

/**
 * The usual looks of a year around each candidate: means over the candidates by their belief, remembered over some
 * layers to either side, so that a stretch of thin, blurred or pale years is held against itself.
 */
export function localReference({ count, values }: Columns, belief: Float64Array): Columns {
  const reference = new Float64Array(count * featureCount)
  const weight = new Float64Array(count)
  let all = 1e-9
  const mean = new Float64Array(featureCount)
  for (let i = 0; i < count; i++) {
    all += belief[i]
    for (let f = 0; f < featureCount; f++) mean[f] += belief[i] * values[i * featureCount + f]
  }
  const sum = new Float64Array(featureCount)
  for (const direction of [1, -1]) {
    sum.fill(0)
    let near = 0
    for (let step = 0; step < count; step++) {
      const i = direction > 0 ? step : count - 1 - step
      const decay = Math.exp(-belief[i] / referenceMemory)
      // The candidate itself is counted on the way down only.
      const own = direction > 0 ? belief[i] : 0
      near = near * decay
      for (let f = 0; f < featureCount; f++) {
        sum[f] *= decay
        reference[i * featureCount + f] += sum[f] + own * values[i * featureCount + f]
        sum[f] += belief[i] * values[i * featureCount + f]
      }
      weight[i] += near + own
      near += belief[i]
    }
  }
  for (let i = 0; i < count; i++) {
    for (let f = 0; f < featureCount; f++) {
      const at = i * featureCount + f
      reference[at] = (reference[at] + (referencePrior * mean[f]) / all) / (weight[i] + referencePrior)
    }
  }
  return { count, values: reference }
}

/** What the regression sees: looks against the usual looks, bounded. */
export function featuresOf({ count, values }: Columns, reference: Columns): Columns {
  const features = new Float64Array(count * featureCount)
  for (let at = 0; at < features.length; at++) {
    const difference = bounded(values[at] - reference.values[at])
    // A wide lamina is as good as a usual one; a narrow one is often grain that survived the smoothing.
    features[at] = at % featureCount === 3 ? Math.min(0.5, difference) : difference
  }
  return { count, values: features }
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
export function logOddsOf({ count, values }: Columns, { coefficients }: Evidence): Float64Array {
  const odds = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    let sum = coefficients[0]
    for (let f = 0; f < featureCount; f++) sum += coefficients[f + 1] * values[i * featureCount + f]
    odds[i] = Math.max(-mostLogOdds, Math.min(mostLogOdds, sum))
  }
  return odds
}

/** M-step: the most probable coefficients given the beliefs, by a few Newton steps from the present ones. */
export function learnEvidence({ count, values }: Columns, belief: Float64Array, present: Evidence): Evidence {
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
