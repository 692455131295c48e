import { marks } from '../../document/layerSet.ts'
import type { LayerSet } from '../../document/layerSet.ts'

export interface Tally {
  certain: number
  doubtful: number
  rejected: number
  /** Certain years and half the doubtful ones. */
  years: number
  /** Half the doubtful ones: the maximum counting error. */
  error: number
}

/**
 * Doubtful layers as one half plus or minus one half, summed linearly: N = certain + doubtful / 2, maximum counting error
 * = doubtful / 2 (Rasmussen et al. 2006, J. Geophys. Res. 111, D06102). Counted here for the figure that follows every key;
 * the published conventions side by side come from the worker.
 */
export function tally(layers: LayerSet): Tally {
  const counts = [0, 0, 0]
  for (const mark of layers.mark) counts[mark]++
  const of = (name: (typeof marks)[number]) => counts[marks.indexOf(name)]
  const certain = of('certain')
  const doubtful = of('doubtful')
  return { certain, doubtful, rejected: of('rejected'), years: certain + doubtful / 2, error: doubtful / 2 }
}
