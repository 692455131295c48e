import type { Outcome } from '../document/outcome.ts'
import { removeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Takes a whole count away; undo and the journal keep it. */
export function removeCount(state: WorkbenchState, { count }: { count: string }): Outcome<Edit> {
  return makeEdit('count.remove', () => [removeRecord(state.project, 'counts', count)])
}
