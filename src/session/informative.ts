import type { Ladder } from '../../worker/core/ladder.ts'
import { marks, nearest } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'
import { answerShare } from './proposals.ts'
import type { Proposals } from './proposals.ts'

/** A place where a person's judgement says most: the machine is undecided there. */
export interface InformativePlace {
  /** Index of the ladder's site. */
  site: number
  /** Path pixels: of the boundary where one was confirmed, else of the proposal. */
  position: number
  probability: number
  kind: 'open' | 'confirmed'
}

/** Below this p (1 - p) the machine is as good as sure: p under 5 % or over 95 %. */
const leastVariance = 0.05 * 0.95
const certain = marks.indexOf('certain')

/**
 * Open proposals and confirmed boundaries by how undecided the ladder is there: p (1 - p), the variance of a yes or no of
 * probability p, largest first. Boundaries marked doubtful or rejected were weighed already and are left out.
 */
export function mostInformative(ladder: Ladder, layers: LayerSet, open: Proposals): InformativePlace[] {
  const places: InformativePlace[] = []
  let next = 0
  for (let site = 0; site < ladder.position.length; site++) {
    const at = ladder.position[site]
    while (next < open.position.length && open.position[next] < at) next++
    const probability = ladder.probability[site]
    if (!(probability * (1 - probability) >= leastVariance)) continue
    if (open.position[next] === at) places.push({ site, position: at, probability, kind: 'open' })
    else {
      const position = confirmedBy(ladder, site, layers)
      if (position !== null) places.push({ site, position, probability, kind: 'confirmed' })
    }
  }
  const variance = ({ probability }: InformativePlace) => probability * (1 - probability)
  return places.sort((a, b) => variance(b) - variance(a))
}

/** Position of the certain boundary that stands for this site; null when there is none, or another site is nearer to it. */
function confirmedBy({ position, thickness }: Ladder, site: number, layers: LayerSet): number | null {
  const index = nearest(layers, position[site])
  if (index < 0 || layers.mark[index] !== certain) return null
  const mark = layers.position[index]
  const distance = Math.abs(mark - position[site])
  const neighbours = [site - 1, site + 1].filter((k) => k >= 0 && k < position.length)
  const nearer = neighbours.some((k) => Math.abs(mark - position[k]) < distance)
  return distance <= answerShare * thickness[site] && !nearer ? mark : null
}
