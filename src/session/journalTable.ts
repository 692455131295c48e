/**
 * One database with projects: rows in, rows out. journalStore.ts keeps two of them in step.
 *
 * Exports: `JournalTable` — `open(factory, name)`, `entries()`, `read(id)`, `write(state)`, `append(state, transactions)`,
 * `setAside(id, recovered)`, `remove(id)`, `close()` — `ProjectEntry`, `KeptProject`, `snapshotEvery`.
 *
 * Stores of the database, all lines sealed by a checksum (journal.ts):
 * projects  key id              { id, name, lake, version, changed }
 * records   key [project, seq]      { project, seq, schema, line }
 * snapshots key [project, version]  { project, version, line }; the newest two are kept
 * damaged   key automatic           { project, seq, line, reason }: dropped records, kept for whoever wants to look
 */
import type { DBSchema, IDBPDatabase } from 'idb'
import { Fault } from '../../worker/check.ts'
import { encodeRecord, encodeSnapshot } from '../document/journal.ts'
import { currentSchema } from '../document/project.ts'
import type { KeptRecord, KeptSnapshot, Recovered } from '../document/recover.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Transaction } from '../document/transaction.ts'
import { openDatabase } from './buckets.ts'

/** A snapshot is stored with every transaction whose sequence number this divides. */
export const snapshotEvery = 200
const snapshotsKept = 2

/** What the list of projects shows. */
export interface ProjectEntry {
  id: string
  name: string
  lake: string
  version: number
  /** Time of the last transaction, milliseconds since 1970 UTC; 0: none yet. */
  changed: number
}

/** The rows of one project, records by sequence number. */
export interface KeptProject {
  entry: ProjectEntry
  records: KeptRecord[]
  snapshots: KeptSnapshot[]
}

interface Tables extends DBSchema {
  projects: { key: string; value: ProjectEntry }
  records: { key: [string, number]; value: KeptRecord & { project: string } }
  snapshots: { key: [string, number]; value: KeptSnapshot & { project: string } }
  damaged: { key: number; value: { project: string; seq: number; line: string; reason: string } }
}

const tables = ['projects', 'records', 'snapshots'] as const
const durable = { durability: 'strict' } as const

/** All keys of one project in a store with keys [project, number]. */
function keysOf(project: string): IDBKeyRange {
  return IDBKeyRange.bound([project, 0], [project, Infinity])
}

export class JournalTable {
  readonly #db: IDBPDatabase<Tables>

  private constructor(db: IDBPDatabase<Tables>) {
    this.#db = db
  }

  static async open(factory: IDBFactory, name: string): Promise<JournalTable> {
    const db = await openDatabase<Tables>(factory, name, (database) => {
      database.createObjectStore('projects', { keyPath: 'id' })
      database.createObjectStore('records', { keyPath: ['project', 'seq'] })
      database.createObjectStore('snapshots', { keyPath: ['project', 'version'] })
      database.createObjectStore('damaged', { autoIncrement: true })
    })
    return new JournalTable(db)
  }

  close(): void {
    this.#db.close()
  }

  entries(): Promise<ProjectEntry[]> {
    return this.#db.getAll('projects')
  }

  /** Null: no such project here. */
  async read(id: string): Promise<KeptProject | null> {
    const tx = this.#db.transaction(tables, 'readonly')
    const [entry, records, snapshots] = await Promise.all([
      tx.objectStore('projects').get(id),
      tx.objectStore('records').getAll(keysOf(id)),
      tx.objectStore('snapshots').getAll(keysOf(id)),
    ])
    return entry ? { entry, records, snapshots } : null
  }

  /** Writes a project with its whole journal in place of what was kept under its id. */
  async write(state: WorkbenchState): Promise<void> {
    const { id } = state.project
    const tx = this.#db.transaction(tables, 'readwrite', durable)
    const records = tx.objectStore('records')
    const snapshots = tx.objectStore('snapshots')
    const writes: Promise<unknown>[] = [records.delete(keysOf(id)), snapshots.delete(keysOf(id))]
    for (const transaction of state.journal.slice(1)) writes.push(records.add(recordOf(id, transaction)))
    writes.push(snapshots.add({ project: id, version: state.version, line: encodeSnapshot(state) }))
    writes.push(tx.objectStore('projects').put(entryOf(state)))
    await completed(tx, writes)
  }

  /**
   * Appends the transactions that led to `state`, all or none; those that are here already, to the letter, are passed over.
   * Resolves when they are on disk. Rejects with a Fault when another transaction stands in the place of one.
   */
  async append(state: WorkbenchState, transactions: readonly Transaction[]): Promise<void> {
    const { id } = state.project
    const tx = this.#db.transaction(tables, 'readwrite', durable)
    const records = tx.objectStore('records')
    const writes: Promise<unknown>[] = [tx.objectStore('projects').put(entryOf(state))]
    for (const transaction of transactions) {
      const record = recordOf(id, transaction)
      const present = await records.get([id, transaction.seq])
      // A record once written is never replaced.
      if (present && present.line !== record.line) {
        tx.abort()
        await Promise.allSettled([...writes, tx.done])
        throw takenPlace(transaction.seq)
      }
      if (!present) writes.push(records.add(record))
    }
    if (transactions.some(({ seq }) => seq % snapshotEvery === 0)) {
      const snapshots = tx.objectStore('snapshots')
      const old = state.version - snapshotsKept * snapshotEvery
      writes.push(snapshots.delete(IDBKeyRange.bound([id, 0], [id, Math.max(0, old)])))
      writes.push(snapshots.put({ project: id, version: state.version, line: encodeSnapshot(state) }))
    }
    await completed(tx, writes)
  }

  /** Puts dropped records out of the way of new ones, and keeps them for whoever wants to look. */
  async setAside(id: string, { state, dropped }: Recovered): Promise<void> {
    const tx = this.#db.transaction([...tables, 'damaged'], 'readwrite', durable)
    const writes: Promise<unknown>[] = [tx.objectStore('projects').put(entryOf(state))]
    for (const { what, seq, reason } of dropped) {
      if (what === 'past') continue
      const store = what === 'record' ? 'records' : 'snapshots'
      const line = (await tx.objectStore(store).get([id, seq]))?.line ?? ''
      writes.push(tx.objectStore('damaged').add({ project: id, seq, line, reason }))
      writes.push(tx.objectStore(store).delete([id, seq]))
    }
    await completed(tx, writes)
  }

  async remove(id: string): Promise<void> {
    const tx = this.#db.transaction(tables, 'readwrite', durable)
    await completed(tx, [
      tx.objectStore('projects').delete(id),
      tx.objectStore('records').delete(keysOf(id)),
      tx.objectStore('snapshots').delete(keysOf(id)),
    ])
  }
}

function takenPlace(seq: number): Fault {
  const message =
    'the browser could not store the edit: another tab has stored something in its place. ' +
    'Save a project file, then reload the page'
  return new Fault('conflict', 'storage', seq, message)
}

/** Waits until everything is written and the transaction has completed. */
async function completed(tx: { done: Promise<void>; error: DOMException | null }, writes: Promise<unknown>[]) {
  try {
    await Promise.all([...writes, tx.done])
  } catch (error) {
    // When the disk is full each write only says that it was aborted; the transaction knows why.
    throw tx.error ?? error
  }
}

function recordOf(project: string, transaction: Transaction) {
  return { project, seq: transaction.seq, schema: currentSchema, line: encodeRecord(transaction) }
}

function entryOf({ project, version, journal }: WorkbenchState): ProjectEntry {
  const { name, lake } = project.core
  return { id: project.id, name, lake, version, changed: journal.last?.time ?? 0 }
}
