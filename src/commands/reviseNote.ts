import type { PathPixels } from '../../worker/units.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId } from '../document/project.ts'
import { addRecord, changeRecord, removeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { checkOnPath, makeEdit } from './edit.ts'

/** Writes a remark at a place on a transect, path pixels. Its id is `freshId(project, 'notes')` of the state before. */
export function addNote(
  state: WorkbenchState,
  { transect, position, text }: { transect: string; position: PathPixels; text: string },
): Outcome<Edit> {
  return makeEdit('note', () => {
    checkOnPath(state.project, transect, 'position', position)
    return [addRecord(state.project, 'notes', { id: freshId(state.project, 'notes'), transect, position, text })]
  })
}

export function reviseNote(state: WorkbenchState, { note, text }: { note: string; text: string }): Outcome<Edit> {
  return makeEdit('note.revise', () => [changeRecord(state.project, 'notes', note, { text })])
}

export function removeNote(state: WorkbenchState, { note }: { note: string }): Outcome<Edit> {
  return makeEdit('note.remove', () => [removeRecord(state.project, 'notes', note)])
}
