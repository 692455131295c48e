import { Fault } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Names a section. */
export function renameSection(
  state: WorkbenchState,
  { section, name }: { section: string; name: string },
): Outcome<Edit> {
  return makeEdit('section.name', () => {
    if (name.trim() === '') throw new Fault('argument', 'name', name, 'a section must have a name; it is empty')
    return [changeRecord(state.project, 'sections', section, { name: name.trim() })]
  })
}
