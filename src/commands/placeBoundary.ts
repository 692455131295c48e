import { liftLayers, placeLayers } from '../document/layerSteps.ts'
import type { Mark } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { checkOnPath, makeEdit } from './edit.ts'
import { checkFree, checkOutsideSpans, newBoundaries, rejectedWithin } from './roomForBoundaries.ts'

/**
 * Sets one boundary, path pixels. Refused on top of another and inside an event bed or unreadable span;
 * a rejected proposal at the place gives way. The new boundary's id is `nextLayerId(layers)` of the state before.
 */
export function placeBoundary(
  state: WorkbenchState,
  { count: countId, position, mark = 'certain' }: { count: string; position: number; mark?: Mark },
): Outcome<Edit> {
  return makeEdit('place', () => {
    const count = needRecord(state.project, 'counts', countId)
    checkOnPath(state.project, count.transect, 'position', position)
    checkFree(count.layers, position)
    checkOutsideSpans(state.project, count.transect, position)
    const givingWay = rejectedWithin(count.layers, position)
    return [
      givingWay.length > 0 ? liftLayers(count, givingWay) : null,
      placeLayers(count, newBoundaries(count.layers, [position], mark, state.version + 1)),
    ]
  })
}
