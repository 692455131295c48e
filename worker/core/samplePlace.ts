import { Fault } from '../check.ts'
import { expectedYears } from './countChain.ts'
import type { CountChain } from './countChain.ts'
import { layerRowKinds } from './countedLayers.ts'
import type { CountedLayers } from './countedLayers.ts'

/** The layers a sample is cut from, as the lattice needs them. */
export interface SamplePlace {
  /** The level in the middle of the sample; its year is the one the date is about. */
  level: number
  /** Years by which each layer of the sample is expected to be older than that level, [layers of the sample]. */
  older: Float64Array
  /** Share of the sample in each layer, by thickness; sums to 1. */
  share: Float64Array
}

/** Finds the layers of samples; depths in mm. A depth that lies on a boundary belongs to the layer below it. */
export class SamplePlaces {
  private readonly years: Float64Array
  private readonly beds: { from: number; to: number }[]
  /** Depth at which the last layer ends; where that was not seen, one mean thickness below its young edge. */
  readonly end: number

  constructor(
    private readonly layers: CountedLayers,
    private readonly chain: CountChain,
  ) {
    this.years = expectedYears(chain)
    const { depth, thickness, kind } = layers
    this.beds = []
    for (let row = 0; row < depth.length; row++) {
      if (layerRowKinds[kind[row]] === 'event' && thickness[row] > 0) {
        this.beds.push({ from: depth[row], to: depth[row] + thickness[row] })
      }
    }
    const last = depth.length - 1
    const known = thickness[last] > 0 ? thickness[last] : (depth[last] - depth[0]) / Math.max(1, last)
    this.end = depth[last] + known
  }

  /** Why a sample cannot be placed, in words; null where it can. */
  problem(top: number, base: number): string | null {
    const first = this.layers.depth[0]
    if (top > base) return `top_mm ${top} lies below base_mm ${base}; are they swapped?`
    if (top < first) return `${top} mm lies above the first layer, which begins at ${first} mm`
    if (base > this.end) return `${base} mm lies below the last layer, which ends at ${round(this.end)} mm`
    return null
  }

  place(top: number, base: number): SamplePlace {
    const problem = this.problem(top, base)
    if (problem !== null) throw new Fault('argument', 'depth', `${top}..${base}`, `the sample at ${problem}`)
    const level = this.levelAt((top + base) / 2)
    const first = this.levelAt(top)
    const last = this.levelAt(base)
    const older: number[] = []
    const share: number[] = []
    for (let i = first; i <= last; i++) {
      const part = this.sediment(Math.max(top, this.chain.depth[i]), Math.min(base, this.endOf(i)))
      if (!(part > 0)) continue
      older.push(this.years[i] - this.years[level])
      share.push(part)
    }
    // A level, or a sample wholly inside an event bed, has the year of its layer.
    if (share.length === 0) return { level, older: Float64Array.of(0), share: Float64Array.of(1) }
    const total = share.reduce((a, b) => a + b, 0)
    return { level, older: Float64Array.from(older), share: Float64Array.from(share, (one) => one / total) }
  }

  /** The last level that begins at or above a depth. */
  levelAt(depth: number): number {
    let low = 0
    let high = this.chain.levels - 1
    while (low < high) {
      const middle = (low + high + 1) >> 1
      if (this.chain.depth[middle] <= depth) low = middle
      else high = middle - 1
    }
    return low
  }

  private endOf(level: number): number {
    return level + 1 < this.chain.levels ? this.chain.depth[level + 1] : this.end
  }

  /** Thickness between two depths without event beds. */
  private sediment(from: number, to: number): number {
    let sum = to - from
    for (const bed of this.beds) sum -= Math.max(0, Math.min(to, bed.to) - Math.max(from, bed.from))
    return sum
  }
}

const round = (depth: number) => Math.round(depth * 100) / 100
