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
  regular = 0

  constructor(cells: number) {
    this.count = new Float64Array(cells)
    this.logSum = new Float64Array(cells)
  }

  /** Posterior mode of the spread, with a prior worth `layers` layers; the wide part of the law is taken out. */
  sigma(prior: number, layers: number): number {
    const variance = (this.squares / wideInflation + prior * prior * layers) / (this.regular + layers)
    return Math.max(0.07, Math.min(0.6, Math.sqrt(variance)))
  }

  bedShare(prior: number, layers: number): number {
    return Math.min(0.05, (this.beds + prior * layers) / (this.all + layers))
  }
}

/** Variance of the law's mixture of two widths over that of its narrow part. */
const wideInflation = 1 + 0.08 * (1.8 * 1.8 - 1)

/** Pairs of sites as neighbouring boundaries, each by its posterior probability (the xi of Baum-Welch). */
export function layerStatistics(
  parts: (SitePart & { messages: Messages })[],
  law: ThicknessLaw,
  field: ThicknessField,
): LayerStatistics {
  const found = new LayerStatistics(field.logMedian.length)
  const logTable = law.density.map((_, k) => Math.log(Math.max(k, 0.5) / law.perUnit))
  for (const part of parts) addPart(found, part, law, field, logTable)
  return found
}

function addPart(
  found: LayerStatistics,
  { stretch, position, kind, messages }: SitePart & { messages: Messages },
  law: ThicknessLaw,
  field: ThicknessField,
  logTable: Float64Array,
): void {
  const { u, forced } = stretch
  const { down, up, logTotal, probability } = messages
  for (let i = 0; i < u.length; i++) {
    if (!(probability[i] > 1e-6)) continue
    let followed = 0
    let scale = NaN
    let factor = 0
    for (let j = i + 1; j < u.length && u[j] - u[i] <= law.longest; j++) {
      const at = (u[j] - u[i]) * law.perUnit
      const k = Math.floor(at)
      const f = law.density[k] + (at - k) * (law.density[k + 1] - law.density[k])
      if (f > 0 && up.value[j] > 0) {
        if (up.scale[j] !== scale) {
          scale = up.scale[j]
          factor = down.value[i] * Math.exp(down.scale[i] + scale - logTotal)
        }
        const pair = factor * f * up.value[j]
        // Unreadable ground repeats the law and teaches nothing.
        const regular = kind[i] === 'unreadable' || kind[j] === 'unreadable' ? 0 : pair * law.regular[k]
        const log = logTable[k]
        const c = field.cellOf(0.5 * (position[i] + position[j]))
        followed += pair
        found.beds += pair * (1 - law.regular[k])
        found.regular += regular
        found.squares += regular * log * log
        found.count[c] += regular
        found.logSum[c] += regular * (log + field.logMedian[c])
      }
      if (forced[j] === 1) break
    }
    found.all += probability[i]
    // What is followed by nothing within the table is followed by a bed, or is the last layer of the stretch.
    if (i < u.length - 1 && stretch.end - u[i] > law.longest) found.beds += Math.max(0, probability[i] - followed)
  }
}
