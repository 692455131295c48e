/**
 * Undo and redo, read off the journal alone: an undo is a new transaction with the inverse steps that says which ones it
 * reverts, so nothing is erased, nothing else need be stored, and undo reaches back over sessions.
 *
 * Exports: `undo(state, stamp)`, `redo(state, stamp)` (the transaction to apply, or null), `nextUndo(journal)`,
 * `nextRedo(journal)`, `canUndo(state)`, `canRedo(state)`, `mergeWindow`.
 *
 * Neighbouring transactions that continue one another (nudging the same boundary, dragging the same slider) are taken
 * back together.
 */
import type { Journal } from './journal.ts'
import type { WorkbenchState } from './state.ts'
import { invertSteps, mergeAll, mergeSteps } from './steps.ts'
import type { Step } from './steps.ts'
import { createTransaction } from './transaction.ts'
import type { SequenceRange, Stamp, Transaction } from './transaction.ts'

/** Two acts on the same thing within this time are one to undo, milliseconds. */
export const mergeWindow = 1000

/** What the next undo takes back; null when there is nothing. */
export function nextUndo(journal: Journal): SequenceRange | null {
  let seq = journal.version
  for (;;) {
    const transaction = journal.at(seq)
    if (!transaction) return null
    // An undo and what it took back cancel out: go on before both.
    if (transaction.userEvent === 'undo' && transaction.reverts) seq = transaction.reverts.from - 1
    else return { from: startOfGroup(journal, transaction), to: seq }
  }
}

/** The undo that the next redo takes back; null when something else was done since. */
export function nextRedo(journal: Journal): number | null {
  let seq = journal.version
  for (;;) {
    const transaction = journal.at(seq)
    if (transaction?.userEvent === 'undo') return seq
    // A redo and the undo it took back cancel out: what could be redone before that undo still can.
    if (transaction?.userEvent === 'redo' && transaction.reverts) seq = transaction.reverts.from - 1
    else return null
  }
}

export function canUndo(state: WorkbenchState): boolean {
  return nextUndo(state.journal) !== null
}

export function canRedo(state: WorkbenchState): boolean {
  return nextRedo(state.journal) !== null
}

/** The transaction that takes the last act back; null when there is nothing to undo. */
export function undo(state: WorkbenchState, stamp: Stamp): Transaction | null {
  const range = nextUndo(state.journal)
  return range && revert(state, range, 'undo', stamp)
}

/** The transaction that takes the last undo back; null when there is none. */
export function redo(state: WorkbenchState, stamp: Stamp): Transaction | null {
  const seq = nextRedo(state.journal)
  return seq === null ? null : revert(state, { from: seq, to: seq }, 'redo', stamp)
}

function revert(state: WorkbenchState, range: SequenceRange, userEvent: 'undo' | 'redo', stamp: Stamp): Transaction {
  const steps = state.journal.slice(range.from, range.to).flatMap((transaction) => transaction.steps)
  return createTransaction(state.version, { userEvent, steps: invertSteps(mergeAll(steps)) }, stamp, range)
}

/** Sequence number of the first of the transactions that `last` continues. */
function startOfGroup(journal: Journal, last: Transaction): number {
  let first = last
  for (;;) {
    const before = journal.at(first.seq - 1)
    if (!before || !continues(before, first)) return first.seq
    first = before
  }
}

/** Whether `second` goes on with what `first` did: the same act on the same thing, by the same person, soon after. */
export function continues(first: Transaction, second: Transaction): boolean {
  if (first.userEvent !== second.userEvent || first.author !== second.author) return false
  if (first.reverts || second.reverts || first.steps.length !== second.steps.length) return false
  const pause = second.time - first.time
  if (!(pause >= 0 && pause <= mergeWindow)) return false
  return first.steps.every((step, i) => sameTarget(step, second.steps[i]) && mergeSteps(step, second.steps[i]) !== null)
}

/** Placing or marking another boundary is another act; moving the same one, or the same field, is not. */
function sameTarget(first: Step, second: Step): boolean {
  if (first.kind === 'move' && second.kind === 'move') return sameList(first.id, second.id)
  if (first.kind === 'change' && second.kind === 'change') {
    return sameList(Object.keys(first.after), Object.keys(second.after))
  }
  if (first.kind === 'core' && second.kind === 'core') {
    return sameList(Object.keys(first.after), Object.keys(second.after))
  }
  return false
}

function sameList(a: readonly unknown[], b: readonly unknown[]): boolean {
  return a.length === b.length && a.every((item, i) => item === b[i])
}
