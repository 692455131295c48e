import { indicesOfIds, markAt } from '../document/layerSet.ts'
import type { Mark } from '../document/layerSet.ts'
import { markLayers } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Marks boundaries certain, doubtful or rejected; those that already are stay as they are, with their provenance. */
export function markBoundaries(
  state: WorkbenchState,
  { count: countId, ids, mark }: { count: string; ids: readonly number[]; mark: Mark },
): Outcome<Edit> {
  return makeEdit('mark', () => {
    const count = needRecord(state.project, 'counts', countId)
    const indices = indicesOfIds(count.layers, ids)
    const changing = ids.filter((_, i) => markAt(count.layers, indices[i]) !== mark)
    const newMarks = changing.map(() => mark)
    return [changing.length > 0 ? markLayers(count, changing, newMarks, state.version + 1) : null]
  })
}
