import { Draft } from '../commands/edit.ts'
import { needRecord } from '../document/project.ts'
import { addRecord, changeCore } from '../document/recordSteps.ts'
import { applyEdit, newState } from '../document/state.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Stamp } from '../document/transaction.ts'
import { need } from '../document/outcome.ts'

/**
 * What a colleague needs to count one transect elsewhere, as a project of its own under a new id: the section with its
 * scan reference, scale, depth and recipe, the transect, and the spans set apart, without their remarks. No count, no
 * note, no date and no history go with it, so nothing in it can lead the counter.
 */
export function countingPacket(state: WorkbenchState, transectId: string, id: string, stamp: Stamp): WorkbenchState {
  const { project } = state
  const transect = needRecord(project, 'transects', transectId)
  const empty = newState(id)
  const draft = new Draft(empty.project)
  draft.add(changeCore(draft.project, project.core))
  draft.add(addRecord(draft.project, 'sections', needRecord(project, 'sections', transect.section)))
  draft.add(addRecord(draft.project, 'transects', transect))
  for (const span of project.spans) {
    if (span.transect === transectId) draft.add(addRecord(draft.project, 'spans', { ...span, note: '' }))
  }
  return need(applyEdit(empty, { userEvent: 'packet', steps: draft.steps }, stamp)).state
}
