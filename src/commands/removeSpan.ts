import type { Outcome } from '../document/outcome.ts'
import { removeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Takes an event bed, unreadable span or hiatus away; boundaries lifted when it was marked come back only by undo. */
export function removeSpan(state: WorkbenchState, { span }: { span: string }): Outcome<Edit> {
  return makeEdit('span.remove', () => [removeRecord(state.project, 'spans', span)])
}
