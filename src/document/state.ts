/**
 * The document at one moment: a project, its version, and every transaction that led there. A pure value; the session
 * holds the current one and replaces it on dispatch.
 *
 * Exports: `WorkbenchState`, `newState(id)`, `stateWithPast(project, since, transactions)`,
 * `applyTransaction(state, transaction)`,
 * `applyEdit(state, edit, stamp)` (both in one: the new state and the transaction to store), `replay(state, transactions)`.
 */
import { Fault } from '../../worker/check.ts'
import { Journal } from './journal.ts'
import type { Outcome } from './outcome.ts'
import { emptyProject } from './project.ts'
import type { Project } from './project.ts'
import { applySteps } from './steps.ts'
import { createTransaction } from './transaction.ts'
import type { Edit, Stamp, Transaction } from './transaction.ts'

export interface WorkbenchState {
  readonly project: Project
  /** Sequence number of the last transaction; 0 for a new project. */
  readonly version: number
  readonly journal: Journal
}

/** A new, empty project. */
export function newState(id: string): WorkbenchState {
  return { project: emptyProject(id), version: 0, journal: Journal.startingAt(0) }
}

/** A state of which the project is known and the last transactions, those after `since`, are too. */
export function stateWithPast(
  project: Project,
  since: number,
  transactions: readonly Transaction[],
): Outcome<WorkbenchState> {
  let journal = Journal.startingAt(since)
  for (const transaction of transactions) {
    if (transaction.seq !== journal.version + 1) {
      const message = `transaction ${transaction.seq} comes where ${journal.version + 1} is due`
      return new Fault('format', 'seq', transaction.seq, message)
    }
    journal = journal.append(transaction)
  }
  return { project, version: journal.version, journal }
}

/** The state after a transaction; a Fault, and the state as it was, when it starts from another version or does not fit. */
export function applyTransaction(state: WorkbenchState, transaction: Transaction): Outcome<WorkbenchState> {
  const { base, seq } = transaction
  if (base !== state.version || seq !== base + 1) {
    const message = `this edit starts from version ${base} of the project, which is at ${state.version}; make it again`
    return new Fault('conflict', 'base', base, message)
  }
  const project = applySteps(state.project, transaction.steps)
  if (project instanceof Fault) return project
  return { project, version: seq, journal: state.journal.append(transaction) }
}

/** Makes an edit at the current version: the new state and the transaction that led to it. */
export function applyEdit(
  state: WorkbenchState,
  edit: Edit,
  stamp: Stamp,
): Outcome<{ state: WorkbenchState; transaction: Transaction }> {
  const transaction = createTransaction(state.version, edit, stamp)
  const next = applyTransaction(state, transaction)
  return next instanceof Fault ? next : { state: next, transaction }
}

/** The state after these transactions; the Fault of the first that does not fit names its sequence number. */
export function replay(state: WorkbenchState, transactions: readonly Transaction[]): Outcome<WorkbenchState> {
  let current = state
  for (const transaction of transactions) {
    const next = applyTransaction(current, transaction)
    if (next instanceof Fault) {
      return new Fault(next.code, next.field, next.value, `transaction ${transaction.seq}: ${next.message}`)
    }
    current = next
  }
  return current
}
