/**
 * Where a layer is, and where it is split.
 *
 * Exports: `anyStop` (what the cursor stops at), `standsOn(layers, stop)`, `layerBelow(layers, proposals, cursor, stop)`,
 * `splitPlace(proposals, from, to)`.
 */
import { marks } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'
import { nextStop } from './proposals.ts'
import type { Proposals, Stop } from './proposals.ts'

const rejected = marks.indexOf('rejected')
/** Share of a layer at either end in which no split is looked for: a boundary there is a doublet of the layer's own. */
const margin = 0.2

/** Boundaries that count, and proposals. */
export const anyStop = { marks: (mark: number) => mark !== rejected, proposals: true }

/** Whether a stop is a boundary that counts or a proposal, not a rejected one. */
export function standsOn(layers: LayerSet, stop: Stop | null): stop is Stop {
  return stop !== null && (stop.kind === 'proposal' || layers.mark[stop.index] !== rejected)
}

/**
 * Ends of the layer below the cursor, or around it where it stands between boundaries, path pixels; null below the last
 * boundary.
 */
export function layerBelow(
  layers: LayerSet,
  proposals: Proposals,
  cursor: number,
  stop: Stop | null,
): [from: number, to: number] | null {
  const upper = standsOn(layers, stop) ? stop : nextStop(layers, proposals, cursor, -1, anyStop)
  const from = upper?.position ?? 0
  const lower = nextStop(layers, proposals, from, 1, anyStop)
  return lower && [from, lower.position]
}

/** Where a layer is split: at the most probable open candidate well inside it, else half way. Path pixels. */
export function splitPlace({ position, probability }: Proposals, from: number, to: number): number {
  const [low, high] = [from + margin * (to - from), to - margin * (to - from)]
  let best = -1
  for (let k = 0; k < position.length; k++) {
    if (position[k] < low || position[k] > high) continue
    if (best < 0 || probability[k] > probability[best]) best = k
  }
  return best < 0 ? (from + to) / 2 : position[best]
}
