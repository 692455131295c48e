import { liftLayers } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Takes boundaries out of a count; the journal keeps them. */
export function removeBoundaries(
  state: WorkbenchState,
  { count: countId, ids }: { count: string; ids: readonly number[] },
): Outcome<Edit> {
  return makeEdit('remove', () => {
    const count = needRecord(state.project, 'counts', countId)
    return [ids.length > 0 ? liftLayers(count, ids) : null]
  })
}
