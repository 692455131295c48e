import { setChecked } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { checkOnPath, makeEdit } from './edit.ts'

/** Records that the counter has looked at everything younger than this place, path pixels. */
export function setCheckedTo(state: WorkbenchState, { count: id, to }: { count: string; to: number }): Outcome<Edit> {
  return makeEdit('check', () => {
    const count = needRecord(state.project, 'counts', id)
    checkOnPath(state.project, count.transect, 'to', to)
    return [setChecked(count, to)]
  })
}
