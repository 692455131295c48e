import { checkAtLeast } from '../../worker/check.ts'
import { minimalGap, nearest } from '../document/layerSet.ts'
import type { LayerSet, Mark } from '../document/layerSet.ts'
import { placeLayers } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Cause, Edit } from '../document/transaction.ts'
import { checkOnPath, makeEdit } from './edit.ts'
import { newBoundaries, spanAt } from './roomForBoundaries.ts'

export interface CandidateChoice {
  count: string
  /** Path pixels, any order. */
  positions: readonly number[]
  /** A candidate nearer than this to a boundary of the count, of whatever mark, was already decided; path pixels. */
  within?: number
  /** The computation the candidates came from. */
  cause?: Cause
}

/**
 * Sets boundaries with one mark at candidates, many at once. Left out, with no error: those already decided (a boundary
 * or a rejected proposal lies there), those inside an event bed or unreadable span, and doublets of one place.
 */
export function decideCandidates(
  userEvent: string,
  state: WorkbenchState,
  { count: countId, positions, within = minimalGap, cause }: CandidateChoice,
  mark: Mark,
): Outcome<Edit> {
  const decide = () => {
    const count = needRecord(state.project, 'counts', countId)
    checkAtLeast('within', within, 0)
    for (const position of positions) checkOnPath(state.project, count.transect, 'position', position)
    const open = distinct(positions).filter(
      (position) =>
        isOpen(count.layers, position, Math.max(within, minimalGap)) &&
        !spanAt(state.project, count.transect, position),
    )
    if (open.length === 0) return []
    return [placeLayers(count, newBoundaries(count.layers, open, mark, state.version + 1))]
  }
  return makeEdit(userEvent, decide, cause)
}

function isOpen(layers: LayerSet, position: number, within: number): boolean {
  const index = nearest(layers, position)
  return index < 0 || Math.abs(layers.position[index] - position) >= within
}

/** Sorted, and of candidates too near one another to be told apart only the youngest. */
function distinct(positions: readonly number[]): number[] {
  const kept: number[] = []
  for (const position of positions.toSorted((a, b) => a - b)) {
    if (kept.length === 0 || position - kept[kept.length - 1] >= minimalGap) kept.push(position)
  }
  return kept
}
