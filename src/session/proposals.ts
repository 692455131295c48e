import type { Ladder } from '../../worker/core/ladder.ts'
import { lowerBound } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'

/** Proposals still open: sites of the ladder that no mark of the count answers yet. Columns [proposals], sorted downcore. */
export interface Proposals {
  /** Path pixels. */
  readonly position: Float64Array
  readonly probability: Float64Array
  /** 1 where the most probable ladder holds it: these are visited in turn, the others only shown. */
  readonly chosen: Uint8Array
}

/** A mark answers the proposals within this share of the local thickness. */
export const answerShare = 0.35
/** Sites less probable than this are noise and not shown. */
const leastProbability = 0.02

export const noProposals: Proposals = {
  position: new Float64Array(0),
  probability: new Float64Array(0),
  chosen: new Uint8Array(0),
}

/**
 * The sites of a ladder that the count has not answered. A mark of any kind answers, a rejection as well; each mark
 * answers the nearest chosen site within reach, and every unchosen one within reach.
 */
export function openProposals(ladder: Ladder, layers: LayerSet): Proposals {
  const answered = new Uint8Array(ladder.position.length)
  for (let i = 0; i < layers.position.length; i++) answer(ladder, layers.position[i], answered)
  const open: number[] = []
  for (let k = 0; k < answered.length; k++) {
    if (answered[k] || (!ladder.chosen[k] && ladder.probability[k] < leastProbability)) continue
    open.push(k)
  }
  return {
    position: Float64Array.from(open, (k) => ladder.position[k]),
    probability: Float64Array.from(open, (k) => ladder.probability[k]),
    chosen: Uint8Array.from(open, (k) => ladder.chosen[k]),
  }
}

function answer(ladder: Ladder, mark: number, answered: Uint8Array): void {
  const start = indexAtOrBelow(ladder.position, mark)
  let best = -1
  const consider = (k: number): boolean => {
    const distance = Math.abs(ladder.position[k] - mark)
    if (!(distance <= answerShare * ladder.thickness[k])) return false
    if (!ladder.chosen[k]) answered[k] = 1
    else if (!answered[k] && (best < 0 || distance < Math.abs(ladder.position[best] - mark))) best = k
    return true
  }
  for (let k = start; k >= 0 && consider(k); k--);
  for (let k = start + 1; k < answered.length && consider(k); k++);
  if (best >= 0) answered[best] = 1
}

/** Index of the last position at or above `value`; -1 when all lie below. */
function indexAtOrBelow(positions: Float64Array, value: number): number {
  let low = 0
  let high = positions.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (positions[middle] <= value) low = middle + 1
    else high = middle
  }
  return low - 1
}

/** A place the cursor can stand at. */
export type Stop =
  { kind: 'mark'; index: number; position: number } | { kind: 'proposal'; index: number; position: number }

/** Where the cursor can go: marks that count, and proposals of the most probable ladder. */
const stepAside = 1e-6

/** Next stop below (`+1`) or above (`-1`) a position; null at the end. Rejected marks are passed over unless asked for. */
export function nextStop(
  layers: LayerSet,
  proposals: Proposals,
  from: number,
  direction: 1 | -1,
  wanted: { marks: (mark: number) => boolean; proposals: boolean },
): Stop | null {
  const mark = nextMark(layers, from, direction, wanted.marks)
  const proposal = wanted.proposals ? nextProposal(proposals, from, direction) : null
  if (!mark || !proposal) return mark ?? proposal
  return direction * (mark.position - proposal.position) <= 0 ? mark : proposal
}

function nextMark(layers: LayerSet, from: number, direction: 1 | -1, wanted: (mark: number) => boolean): Stop | null {
  let index = direction > 0 ? lowerBound(layers, from + stepAside) : lowerBound(layers, from - stepAside) - 1
  while (index >= 0 && index < layers.position.length) {
    if (wanted(layers.mark[index])) return { kind: 'mark', index, position: layers.position[index] }
    index += direction
  }
  return null
}

function nextProposal(proposals: Proposals, from: number, direction: 1 | -1): Stop | null {
  const { position, chosen } = proposals
  const at = indexAtOrBelow(position, direction > 0 ? from + stepAside : from - stepAside)
  let index = direction > 0 ? at + 1 : at
  while (index >= 0 && index < position.length) {
    if (chosen[index] && direction * (position[index] - from) > stepAside)
      return { kind: 'proposal', index, position: position[index] }
    index += direction
  }
  return null
}

/** The stop at a position, within a hair: the mark there, else the proposal there (chosen or not), else null. */
export function stopAt(layers: LayerSet, proposals: Proposals, position: number, reach: number): Stop | null {
  const below = lowerBound(layers, position)
  let best: Stop | null = null
  for (const index of [below - 1, below]) {
    if (index < 0 || index >= layers.position.length) continue
    best = nearer(best, { kind: 'mark', index, position: layers.position[index] }, position, reach)
  }
  const at = indexAtOrBelow(proposals.position, position)
  for (const index of [at, at + 1]) {
    if (index < 0 || index >= proposals.position.length) continue
    best = nearer(best, { kind: 'proposal', index, position: proposals.position[index] }, position, reach)
  }
  return best
}

function nearer(best: Stop | null, other: Stop, position: number, reach: number): Stop | null {
  const distance = Math.abs(other.position - position)
  if (!(distance <= reach)) return best
  return best && Math.abs(best.position - position) <= distance ? best : other
}
