import { checkSameLength, Fault } from '../../worker/check.ts'
import { indicesOfIds, marks, minimalGap } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'
import { liftLayers, moveLayers } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { checkOnPath, describePlace, Draft, makeEdit } from './edit.ts'
import { checkOutsideSpans, rejectedWithin } from './roomForBoundaries.ts'

const rejected = marks.indexOf('rejected')

/**
 * Moves boundaries to new positions, path pixels, in the order of `ids`. Refused onto or past a neighbour that counts,
 * off the transect, and into an event bed or unreadable span; rejected proposals in the way give way.
 */
export function moveBoundaries(
  state: WorkbenchState,
  { count: countId, ids, positions }: { count: string; ids: readonly number[]; positions: readonly number[] },
): Outcome<Edit> {
  return makeEdit('move', () => {
    const count = needRecord(state.project, 'counts', countId)
    checkSameLength('positions', positions, ids.length)
    const indices = indicesOfIds(count.layers, ids)
    for (const position of positions) {
      checkOnPath(state.project, count.transect, 'position', position)
      checkOutsideSpans(state.project, count.transect, position)
    }
    checkOrderKept(count.layers, indices, positions)
    const rows = ids.map((_, i) => i).filter((i) => count.layers.position[indices[i]] !== positions[i])
    if (rows.length === 0) return []
    const moved = new Set(ids)
    const counted = rows.filter((i) => count.layers.mark[indices[i]] !== rejected)
    const givingWay = new Set(counted.flatMap((i) => rejectedWithin(count.layers, positions[i])))
    const lifted = [...givingWay].filter((id) => !moved.has(id))
    // A draft, because a proposal that is moved may itself land on something; its Fault is the answer.
    const draft = new Draft(state.project)
    draft.add(lifted.length > 0 ? liftLayers(count, lifted) : null)
    draft.add(
      moveLayers(
        count,
        rows.map((i) => ids[i]),
        rows.map((i) => positions[i]),
        state.version + 1,
      ),
    )
    return draft.steps
  })
}

/** The boundaries that count must stay in their order, apart from one another. */
function checkOrderKept(layers: LayerSet, indices: readonly number[], positions: readonly number[]): void {
  const position = layers.position.slice()
  indices.forEach((index, i) => (position[index] = positions[i]))
  let before = -Infinity
  for (let index = 0; index < position.length; index++) {
    if (layers.mark[index] === rejected) continue
    if (!(position[index] - before >= minimalGap)) {
      const onto = Math.abs(position[index] - before) < minimalGap
      const message = onto
        ? `this would put a boundary on its neighbour at ${describePlace(before)}; remove one of them instead`
        : `a boundary cannot be moved past its neighbour at ${describePlace(before)}; remove one of them first`
      throw new Fault('conflict', 'position', position[index], message)
    }
    before = position[index]
  }
}
