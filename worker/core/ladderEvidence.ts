import type { Candidates } from './candidates.ts'

/**
 * What the image says about a candidate, as one number: the log of how much likelier its looks are for a boundary between
 * years than for anything else (a second lamina inside the year, grain, a scratch).
 *
 * Looks are put on a scale each (features), combined into one score by Fisher's linear discriminant (Fisher 1936), and the
 * score turned into a log ratio by comparing how often it occurs among boundaries and among the rest, in steps that may
 * only rise (pool adjacent violators; Ayer et al. 1955). All of it is learned on the core by EM; the priors below say
 * what holds before anything is learned and how many candidates their word is worth.
 */
export interface Evidence {
  /** Weight of each feature in the score. */
  weights: Float64Array
  /** Upper edges of the steps in score, and log ratio of each; [steps]. */
  edges: Float64Array
  logRatio: Float64Array
}

/** Features of every candidate, row-major [candidates x features]. */
export interface Features {
  count: number
  width: number
  values: Float64Array
  /** Log odds assumed before learning, [candidates]. */
  prior: Float64Array
}

/** Candidates' worth of each prior. */
const priorWeight = 6
/** Bounds of what looks alone may say. */
const mostLogRatio = 7

/** Puts the looks of all candidates on common scales: robustly standardised, bounded, none missing. */
export function featuresOf(candidates: Candidates, layers: number): Features {
  const count = candidates.position.length
  const reference = strongContrast(candidates.prominence, layers)
  const columns = [
    candidates.prominence.map((value) => Math.log(Math.max(value, 1e-3) / reference)),
    candidates.height.map((value) => value / reference),
    candidates.edgeStrength.map((value) => Math.log(Math.max(value, 1e-2))),
    candidates.continuity,
    candidates.contrast.map((value) => Math.log(Math.max(value, 1e-6))),
  ]
  const prior = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    // Half as prominent as a typical strong lamina and seen in half of the lanes: undecided.
    const strength = 2.5 * Math.log(Math.max(candidates.prominence[i], 1e-3) / (0.5 * reference))
    const lateral = 3 * ((Number.isFinite(candidates.continuity[i]) ? candidates.continuity[i] : 0.5) - 0.5)
    prior[i] = Math.max(-4, Math.min(3, strength + lateral))
  }
  const width = columns.length
  const values = new Float64Array(count * width)
  for (let f = 0; f < width; f++) {
    const { centre, spread } = robustScale(columns[f])
    for (let i = 0; i < count; i++) {
      const scaled = (columns[f][i] - centre) / spread
      values[i * width + f] = Number.isNaN(scaled) ? 0 : Math.max(-3, Math.min(3, scaled))
    }
  }
  return { count, width, values, prior }
}

/** Median prominence of as many of the strongest candidates as there should be layers. */
function strongContrast(prominence: Float64Array, layers: number): number {
  const sorted = prominence.filter((value) => value > 0).sort()
  if (sorted.length === 0) return 1
  const strong = Math.max(1, Math.min(sorted.length, Math.round(layers)))
  return sorted[sorted.length - 1 - Math.floor(strong / 2)]
}

function robustScale(column: Float64Array): { centre: number; spread: number } {
  const sorted = column.filter((value) => Number.isFinite(value)).sort()
  if (sorted.length === 0) return { centre: 0, spread: 1 }
  const at = (share: number) => sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))]
  const spread = (at(0.9) - at(0.1)) / 2.56
  return { centre: at(0.5), spread: spread > 0 ? spread : 1 }
}

/**
 * M-step: evidence that fits the present beliefs. `belief` [candidates] is the probability that each is a boundary.
 * Returns the log ratio of every candidate beside the evidence itself.
 */
export function learnEvidence(
  features: Features,
  belief: Float64Array,
): { evidence: Evidence; logRatio: Float64Array } {
  const weights = discriminant(features, belief)
  const score = scoresOf(features, weights)
  const { edges, logRatio } = risingRatio(score, belief)
  const evidence = { weights, edges, logRatio }
  return { evidence, logRatio: score.map((value) => ratioAt(evidence, value)) }
}

export function scoresOf({ count, width, values }: Features, weights: Float64Array): Float64Array {
  const score = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    for (let f = 0; f < width; f++) score[i] += weights[f] * values[i * width + f]
  }
  return score
}

/** Fisher's discriminant between boundaries and the rest, each candidate counted by belief, with a ridge. */
function discriminant({ count, width, values }: Features, belief: Float64Array): Float64Array {
  const means = [new Float64Array(width), new Float64Array(width)]
  const sizes = [priorWeight, priorWeight]
  for (let i = 0; i < count; i++) {
    sizes[0] += 1 - belief[i]
    sizes[1] += belief[i]
    for (let f = 0; f < width; f++) {
      means[0][f] += (1 - belief[i]) * values[i * width + f]
      means[1][f] += belief[i] * values[i * width + f]
    }
  }
  for (let f = 0; f < width; f++) {
    // Prior: strong laminae half a spread above, others half a spread below the middle.
    means[0][f] = (means[0][f] - 0.5 * priorWeight) / sizes[0]
    means[1][f] = (means[1][f] + 0.5 * priorWeight) / sizes[1]
  }
  const matrix = new Float64Array(width * width)
  for (let i = 0; i < count; i++) {
    for (let f = 0; f < width; f++) {
      const a0 = values[i * width + f] - means[0][f]
      const a1 = values[i * width + f] - means[1][f]
      for (let g = 0; g <= f; g++) {
        const b0 = values[i * width + g] - means[0][g]
        const b1 = values[i * width + g] - means[1][g]
        matrix[f * width + g] += (1 - belief[i]) * a0 * b0 + belief[i] * a1 * b1
      }
    }
  }
  const total = count + 2 * priorWeight
  for (let f = 0; f < width; f++) {
    for (let g = 0; g <= f; g++) {
      matrix[f * width + g] /= total
      matrix[g * width + f] = matrix[f * width + g]
    }
    matrix[f * width + f] += 0.2
  }
  return solve(
    matrix,
    means[1].map((value, f) => value - means[0][f]),
  )
}

/** Solves a symmetric positive definite system by Cholesky's factors. */
export function solve(matrix: Float64Array, right: Float64Array): Float64Array {
  const n = right.length
  const lower = matrix.slice()
  const x = right.slice()
  for (let j = 0; j < n; j++) {
    for (let i = j; i < n; i++) {
      let sum = lower[i * n + j]
      for (let k = 0; k < j; k++) sum -= lower[i * n + k] * lower[j * n + k]
      lower[i * n + j] = i === j ? Math.sqrt(sum) : sum / lower[j * n + j]
    }
  }
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < i; k++) x[i] -= lower[i * n + k] * x[k]
    x[i] /= lower[i * n + i]
  }
  for (let i = n - 1; i >= 0; i--) {
    for (let k = i + 1; k < n; k++) x[i] -= lower[k * n + i] * x[k]
    x[i] /= lower[i * n + i]
  }
  return x
}

/** Log ratio in steps of score with equal numbers of candidates, smoothed, then pooled until it only rises. */
function risingRatio(score: Float64Array, belief: Float64Array): { edges: Float64Array; logRatio: Float64Array } {
  const order = Uint32Array.from(score.keys()).sort((a, b) => score[a] - score[b])
  const steps = Math.max(1, Math.min(40, Math.floor(score.length / 15)))
  const edges = new Float64Array(steps)
  const yes = new Float64Array(steps)
  const no = new Float64Array(steps)
  for (let k = 0; k < order.length; k++) {
    const step = Math.min(steps - 1, Math.floor((k * steps) / order.length))
    yes[step] += belief[order[k]]
    no[step] += 1 - belief[order[k]]
    edges[step] = score[order[k]]
  }
  const allYes = sum(yes)
  const allNo = sum(no)
  const smoothYes = smoothed(yes).map((value) => (value + priorWeight / steps) / (allYes + priorWeight))
  const smoothNo = smoothed(no).map((value) => (value + priorWeight / steps) / (allNo + priorWeight))
  return { edges, logRatio: pooled(smoothYes, smoothNo) }
}

function sum(values: Float64Array): number {
  let total = 0
  for (const one of values) total += one
  return total
}

function smoothed(values: Float64Array): Float64Array {
  const last = values.length - 1
  return values.map((value, k) => 0.5 * value + 0.25 * (values[Math.max(0, k - 1)] + values[Math.min(last, k + 1)]))
}

/** Pool adjacent violators on the ratio of two sets of shares. */
function pooled(yes: Float64Array, no: Float64Array): Float64Array {
  const blocks: { yes: number; no: number; length: number }[] = []
  for (let k = 0; k < yes.length; k++) {
    blocks.push({ yes: yes[k], no: no[k], length: 1 })
    for (;;) {
      const last = blocks.at(-1)!
      const before = blocks.at(-2)
      if (before === undefined || before.yes * last.no <= last.yes * before.no) break
      blocks.pop()
      before.yes += last.yes
      before.no += last.no
      before.length += last.length
    }
  }
  const result = new Float64Array(yes.length)
  let at = 0
  for (const block of blocks) {
    const log = Math.max(-mostLogRatio, Math.min(mostLogRatio, Math.log(block.yes / block.no)))
    result.fill(log, at, at + block.length)
    at += block.length
  }
  return result
}

/** Log ratio of a score. */
export function ratioAt({ edges, logRatio }: Evidence, score: number): number {
  let low = 0
  let high = edges.length - 1
  while (low < high) {
    const middle = (low + high) >> 1
    if (edges[middle] >= score) high = middle
    else low = middle + 1
  }
  return logRatio[low] ?? 0
}
