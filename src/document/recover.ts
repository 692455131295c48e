/**
 * From what a store kept back to a state: the newest sound snapshot, then the records after it. A record that is torn,
 * altered, missing or does not fit ends the replay there; it and what follows are dropped and reported, never guessed.
 *
 * Exports: `recover(kept)`, `Kept`, `Recovered`, `Dropped`.
 */
import { Fault } from '../../worker/check.ts'
import { decodeRecord, decodeSnapshot, Journal } from './journal.ts'
import type { Snapshot } from './journal.ts'
import type { Outcome } from './outcome.ts'
import { emptyProject } from './project.ts'
import { applyTransaction } from './state.ts'
import type { WorkbenchState } from './state.ts'
import type { Transaction } from './transaction.ts'

/** One stored line and the schema it was written under. */
export interface KeptRecord {
  seq: number
  schema: number
  line: string
}
export interface KeptSnapshot {
  version: number
  line: string
}

/** What a store kept of one project, in any order. */
export interface Kept {
  id: string
  records: readonly KeptRecord[]
  snapshots: readonly KeptSnapshot[]
}

/** Something that could not be used, and why. */
export interface Dropped {
  what: 'record' | 'snapshot' | 'past'
  /** Sequence number of the record, or version of the snapshot. */
  seq: number
  reason: string
}

export interface Recovered {
  state: WorkbenchState
  /**
   * `record`: an edit after the snapshot that is lost; `snapshot`: one that is damaged, with no loss; `past`: an old record
   * whose effect is in the project but which can be neither undone nor asked about.
   */
  dropped: Dropped[]
}

export function recover({ id, records, snapshots }: Kept): Recovered {
  const dropped: Dropped[] = []
  const start = newestSnapshot(id, snapshots, dropped)
  const sorted = records.toSorted((a, b) => a.seq - b.seq)
  const past = sorted.filter(({ seq }) => seq <= start.version)
  const tail = sorted.filter(({ seq }) => seq > start.version)
  const before: WorkbenchState = { ...start, journal: readPast(start.version, past, dropped) }
  return { state: replayTail(before, tail, dropped), dropped }
}

function newestSnapshot(id: string, snapshots: readonly KeptSnapshot[], dropped: Dropped[]): Snapshot {
  for (const { version, line } of snapshots.toSorted((a, b) => b.version - a.version)) {
    const snapshot = decodeSnapshot(line)
    if (snapshot instanceof Fault) {
      // A newer program's project is whole, only not for this one: nothing may be dropped.
      if (snapshot.code === 'unsupported') throw snapshot
      dropped.push({ what: 'snapshot', seq: version, reason: snapshot.message })
    } else if (snapshot.project.id !== id) {
      dropped.push({ what: 'snapshot', seq: version, reason: `this snapshot is of project "${snapshot.project.id}"` })
    } else return snapshot
  }
  return { version: 0, project: emptyProject(id) }
}

function decode({ seq, schema, line }: KeptRecord): Outcome<Transaction> {
  const transaction = decodeRecord(line, schema)
  if (transaction instanceof Fault) {
    if (transaction.code === 'unsupported') throw transaction
    return transaction
  }
  if (transaction.seq === seq) return transaction
  return new Fault('format', 'seq', transaction.seq, `record ${seq} says it is transaction ${transaction.seq}`)
}

/** The unbroken run of sound records that ends at the snapshot. */
function readPast(version: number, past: readonly KeptRecord[], dropped: Dropped[]): Journal {
  const run: Transaction[] = []
  let expected = version
  for (const record of past.toReversed()) {
    const transaction = record.seq === expected ? decode(record) : missing(expected)
    if (transaction instanceof Fault) {
      dropped.push({ what: 'past', seq: expected, reason: transaction.message })
      break
    }
    run.push(transaction)
    expected--
  }
  if (past.length === 0 && version > 0) dropped.push({ what: 'past', seq: version, reason: missing(version).message })
  return run.reverse().reduce((journal, transaction) => journal.append(transaction), Journal.startingAt(expected))
}

function replayTail(start: WorkbenchState, tail: readonly KeptRecord[], dropped: Dropped[]): WorkbenchState {
  let state = start
  for (const [i, record] of tail.entries()) {
    const expected = state.version + 1
    const transaction = record.seq === expected ? decode(record) : missing(expected)
    const next = transaction instanceof Fault ? transaction : applyTransaction(state, transaction)
    if (next instanceof Fault) {
      dropped.push({ what: 'record', seq: record.seq, reason: next.message })
      for (const { seq } of tail.slice(i + 1)) {
        dropped.push({ what: 'record', seq, reason: `it follows record ${record.seq}, which is lost` })
      }
      return state
    }
    state = next
  }
  return state
}

function missing(seq: number): Fault {
  return new Fault('unreadable', 'record', seq, `record ${seq} is missing`)
}
