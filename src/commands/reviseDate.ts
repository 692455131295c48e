import type { Outcome } from '../document/outcome.ts'
import { freshId } from '../document/project.ts'
import type { CoreDate } from '../document/project.ts'
import { addRecord, changeRecord, removeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Adds a dated level or sample. Its id is `freshId(project, 'dates')` of the state before. */
export function addDate(state: WorkbenchState, date: Omit<CoreDate, 'id'>): Outcome<Edit> {
  return makeEdit('date', () => [addRecord(state.project, 'dates', { id: freshId(state.project, 'dates'), ...date })])
}

/** Changes what is known of a date, or whether it takes part in the age model. */
export function reviseDate(
  state: WorkbenchState,
  { date, ...fields }: { date: string } & Partial<Omit<CoreDate, 'id'>>,
): Outcome<Edit> {
  return makeEdit('date.revise', () => [changeRecord(state.project, 'dates', date, fields)])
}

export function removeDate(state: WorkbenchState, { date }: { date: string }): Outcome<Edit> {
  return makeEdit('date.remove', () => [removeRecord(state.project, 'dates', date)])
}
