import { numberSteps, phaseSteps } from './layerPairs.ts'
import type { InnerLaw, YearLaw } from './layerPairs.ts'
import type { SitePart } from './ladderSites.ts'
import type { Messages } from './semiMarkov.ts'
import type { ThicknessField } from './thicknessField.ts'
import type { ThicknessLaw } from './thicknessLaw.ts'

/** Expected layers of a posterior: how many stand in each cell of the field, how thick they are against the local median. */
export class LayerStatistics {
  /** Expected number of regular layers centred in each cell, and the sum of their log thickness in path pixels; [cells]. */
  readonly count: Float64Array
  readonly logSum: Float64Array
  /** Expected numbers of layers: all, and those thick by an unmarked bed. */
  all = 0
  beds = 0
  squares = 0
  /** Mean log thickness over the local median of the layer above each candidate, were it a boundary, [candidates]. */
  readonly above: Float64Array
  lagged = 0
  laggedSquares = 0
  /** Expected laminae inside years, by their phase. */
  readonly phase = new Float64Array(phaseSteps)
  /** Expected layers by their number of inner laminae. */
  readonly number = new Float64Array(numberSteps)
  regular = 0

  constructor(cells: number, candidates: number) {
    this.above = new Float64Array(candidates)
    this.count = new Float64Array(cells)
    this.logSum = new Float64Array(cells)
  }

  /** Posterior mode of the spread, with a prior worth `layers` layers; the wide part of the law is taken out. */
  sigma(prior: number, layers: number): number {
    const variance = (this.squares / wideInflation + prior * prior * layers) / (this.regular + layers)
    return Math.max(0.07, Math.min(0.6, 1.15 * Math.sqrt(variance)))
  }

  /** Inner laminae per layer and where they lie; the prior is `prior` of them a layer, evenly, worth `layers` layers. */
  inner(prior: number, layers: number): InnerLaw {
    const all = this.phase.reduce((sum, one) => sum + one, 0)
    const even = evenWeight / phaseSteps
    const smooth = this.phase.map(
      (one, k) => 0.5 * one + 0.25 * ((this.phase[k - 1] ?? one) + (this.phase[k + 1] ?? one)),
    )
    const sum = smooth.reduce((total, one) => total + one, 0) + evenWeight
    const rate = (all + prior * layers) / (this.all + layers)
    const counted = this.number.reduce((total, one) => total + one, 0)
    return {
      rate,
      number: this.number.map(
        (one, k) => ((one + layers * poisson(k, prior)) / (counted + layers)) * (factorial(k) / rate ** k),
      ),
      phase: smooth.map((one) => ((one + even) * phaseSteps) / sum),
    }
  }

  /** How much of a layer's departure from the local median the next one keeps (AR(1)). */
  memory(prior: number, spread: number, layers: number): number {
    const weight = layers * spread * spread
    return Math.max(0, Math.min(0.8, (this.lagged + prior * weight) / (this.laggedSquares + weight)))
  }

  bedShare(prior: number, layers: number): number {
    return Math.min(0.05, (this.beds + prior * layers) / (this.all + layers))
  }
}

function factorial(k: number): number {
  return k < 2 ? 1 : k * factorial(k - 1)
}

function poisson(k: number, mean: number): number {
  return (Math.exp(-mean) * mean ** k) / factorial(k)
}

/** Inner laminae that the even prior of their phase is worth. */
const evenWeight = 24
/** Variance of the law's mixture of two widths over that of its narrow part. */
const wideInflation = 1 + 0.08 * (1.8 * 1.8 - 1)

/** Pairs of sites as neighbouring boundaries, each by its posterior probability (the xi of Baum-Welch). */
export function layerStatistics(
  parts: (SitePart & { messages: Messages })[],
  law: YearLaw,
  field: ThicknessField,
  candidates: number,
): LayerStatistics {
  const found = new LayerStatistics(field.logMedian.length, candidates)
  const logTable = law.thickness.density.map((_, k) => Math.log(Math.max(k, 0.5) / law.thickness.perUnit))
  for (const part of parts) addPart(found, part, law.thickness, field, logTable)
  return found
}

function addPart(
  found: LayerStatistics,
  { stretch, position, kind, candidate, messages }: SitePart & { messages: Messages },
  law: ThicknessLaw,
  field: ThicknessField,
  logTable: Float64Array,
): void {
  const { u, shows, expected } = stretch
  const { down, up, pairs, logTotal, probability } = messages
  const inside = new Float64Array(u.length)
  const above = new Float64Array(u.length)
  for (let i = 0; i < u.length; i++) {
    if (!(probability[i] > 1e-6)) continue
    let followed = 0
    let scale = NaN
    let factor = 0
    let seen = 0
    for (let at = pairs.offset[i], j = i + 1; at < pairs.offset[i + 1]; at++, j++) {
      const d = u[j] - u[i]
      if (up.scale[j] !== scale) {
        scale = up.scale[j]
        factor = down.value[i] * Math.exp(down.scale[i] + scale - logTotal)
      }
      const pair = factor * pairs.weight[at] * up.value[j]
      if (pair > 1e-9) {
        const k = Math.floor(d * law.perUnit)
        // Unreadable ground repeats the law and teaches nothing.
        const regular = kind[i] === 'unreadable' || kind[j] === 'unreadable' ? 0 : pair * law.regular[k]
        const log = logTable[k]
        const c = field.cellOf(0.5 * (position[i] + position[j]))
        followed += pair
        found.beds += pair * (1 - law.regular[k])
        found.regular += regular
        found.squares += regular * (log - expected[i]) ** 2
        above[j] += regular * log
        if (probability[i] > 1e-3 && candidate[i] >= 0) {
          // The mean of the layer above is complete: all its pairs end at i and have been passed.
          const before = above[i] / probability[i]
          found.lagged += regular * log * before
          found.laggedSquares += regular * before * before
        }
        found.count[c] += regular
        found.logSum[c] += regular * (log + field.logMedian[c])
        found.number[Math.min(numberSteps - 1, seen)] += pair
        for (let s = 0; s < seen; s++)
          found.phase[Math.min(phaseSteps - 1, Math.floor((inside[s] * phaseSteps) / d))] += pair
      }
      if (shows[j] === 1) inside[seen++] = d
    }
    if (candidate[i] >= 0 && probability[i] > 1e-3) found.above[candidate[i]] = above[i] / probability[i]
    found.all += probability[i]
    // What is followed by nothing within the table is followed by a bed, or is the last layer of the stretch.
    if (i < u.length - 1 && stretch.end - u[i] > law.longest) found.beds += Math.max(0, probability[i] - followed)
  }
}
