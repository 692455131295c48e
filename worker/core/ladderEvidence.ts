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

/** What is seen of a candidate; each is held against the usual of the years around it, so that 0 is a usual year. */
const features = [
  'log contrast',
  'log edge strength in the same units',
  'continuity',
  'log width over local thickness, where narrow',
  'the same, where wide',
  'log edge strength over the strongest nearby',
] as const
export const featureCount = features.length
/**
 * What holds before anything is learned: the log odds of a candidate with the looks given, and how far a core may depart
 * from it (standard deviation). Figures are rounded from regressions on drawn cores of all types.
 */
const anchors = [
  // The looks of a usual year.
  { looks: [0, 0, 0.1, 0, 0, 0], logOdds: 4.5, deviation: 1 },
  // Half as strong: a pale year here, a second lamina of the year there.
  { looks: [-0.8, -0.9, 0, -0.3, 0, -0.7], logOdds: 0.5, deviation: 2 },
  // What grain looks like, beside a lamina and by itself.
  { looks: [-2.2, -2, -0.4, -0.7, 0, -1.5], logOdds: -6, deviation: 1 },
  { looks: [-2.2, -2, -0.4, -0.5, 0, 0], logOdds: -5, deviation: 1 },
]
/** Coefficients of the constant and the features that agree with that, and how far each may depart by itself. */
const priorMean = [4.2, 0.6, 2.2, 2, 1, -3, 3]
const priorDeviation = [3, 1, 1.5, 1, 1, 1.5, 1.5]
/** Looks alone never say more than this. */
const mostLogOdds = 6
/** Logs of features are bounded: beyond a twelfth or three times the usual nothing more is learned. */
const leastLog = -2.5
const mostLog = 1.1
/** Log of how much wider than usual a lamina may be before it speaks against a year. */
const usualWidth = 0.3
/** Candidates closer than this share of the local thickness are likely to belong to the same year. */
const nearbyShare = 0.7
/** Layers over which the usual looks are remembered, and layers that the core's mean is worth. */
const referenceMemory = 15
const referencePrior = 5

const logOf = (value: number, least: number) => Math.log(Math.max(value, least))
const bounded = (value: number) => (Number.isNaN(value) ? 0 : Math.max(leastLog, Math.min(mostLog, value)))

/** The looks of the candidates as they are; widths against the local thickness `median` [candidates]. */
export function looksOf(candidates: Candidates, median: Float64Array): Columns {
  const count = candidates.position.length
  const values = new Float64Array(count * featureCount)
  const nearby = strongestNearby(candidates, median)
  for (let i = 0; i < count; i++) {
    const at = i * featureCount
    // In the profile's own units: local standard deviations make the grain of an event bed look like laminae.
    const spread = candidates.prominence[i] > 0 ? candidates.contrast[i] / candidates.prominence[i] : 0
    values[at] = logOf(candidates.contrast[i], 1e-9)
    values[at + 1] = logOf(candidates.edgeStrength[i] * spread, 1e-9)
    values[at + 2] = Number.isNaN(candidates.continuity[i]) ? 1 : candidates.continuity[i]
    values[at + 3] = logOf(candidates.width[i] / median[i], 1e-3)
    values[at + 4] = values[at + 3]
    values[at + 5] = Math.min(0, logOf(candidates.edgeStrength[i], 1e-9) - logOf(nearby[i], 1e-9))
  }
  return { count, values }
}

/** The greatest edge strength of any other candidate within most of a layer's thickness, [candidates]; 0 where there is none. */
function strongestNearby({ peak, edgeStrength }: Candidates, median: Float64Array): Float64Array {
  return peak.map((at, i) => {
    const reach = nearbyShare * median[i]
    let strongest = 0
    for (let k = i - 1; k >= 0 && at - peak[k] < reach; k--) strongest = Math.max(strongest, edgeStrength[k])
    for (let k = i + 1; k < peak.length && peak[k] - at < reach; k++) strongest = Math.max(strongest, edgeStrength[k])
    return strongest
  })
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
  for (let at = 0; at < features.length; at++) features[at] = bounded(values[at] - reference.values[at])
  for (let at = 0; at < features.length; at += featureCount) {
    // A narrow lamina is often grain that survived the smoothing; one as wide as a layer is the cap or the body of an event bed.
    features[at + 4] = Math.max(0, features[at + 3] - usualWidth)
    features[at + 3] = Math.min(0, features[at + 3])
    // The last feature is a comparison already.
    features[at + 5] = bounded(values[at + 5])
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
  for (const anchor of anchors)
    log -= 0.5 * ((oddsAt(anchor.looks, coefficients) - anchor.logOdds) / anchor.deviation) ** 2
  return log
}

function oddsAt(looks: readonly number[], coefficients: Float64Array): number {
  return looks.reduce((sum, value, f) => sum + coefficients[f + 1] * value, coefficients[0])
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
    for (const { looks, logOdds, deviation } of anchors) {
      row.set(looks, 1)
      const precision = 1 / deviation ** 2
      for (let k = 0; k < size; k++) {
        gradient[k] += precision * (logOdds - oddsAt(looks, coefficients)) * row[k]
        for (let l = 0; l <= k; l++) curvature[k * size + l] += precision * row[k] * row[l]
      }
    }
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
