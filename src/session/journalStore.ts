/**
 * Projects in the browser's IndexedDB: every transaction as one record, a snapshot every 200, one writing tab at a time.
 *
 * Exports: `JournalStore` —
 * `JournalStore.open(options?)`, `list()`, `claimProject(id)` (true: this tab may write), `releaseProject(id)`,
 * `create(state)` (a new or opened project with all its journal), `load(id)` (state and what was dropped),
 * `append(state, ...transactions)` (resolves once the records are on disk), `remove(id)`, `askToPersist()`, `close()` —
 * and `snapshotEvery`.
 *
 * Stores of the database, all lines sealed by a checksum (journal.ts):
 * projects  key id              { id, name, lake, version, changed }
 * records   key [project, seq]      { project, seq, schema, line }
 * snapshots key [project, version]  { project, version, line }; the newest two are kept
 * damaged   key automatic           { project, seq, line, reason }: dropped records, kept for whoever wants to look
 */
import { openDB } from 'idb'
import type { DBSchema, IDBPDatabase } from 'idb'
import { Fault } from '../../worker/check.ts'
import { encodeRecord, encodeSnapshot } from '../document/journal.ts'
import { currentSchema } from '../document/project.ts'
import { recover } from '../document/recover.ts'
import type { KeptRecord, KeptSnapshot, Recovered } from '../document/recover.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Transaction } from '../document/transaction.ts'
import { storageFault } from './storageFault.ts'

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

interface Tables extends DBSchema {
  projects: { key: string; value: ProjectEntry }
  records: { key: [string, number]; value: KeptRecord & { project: string } }
  snapshots: { key: [string, number]; value: KeptSnapshot & { project: string } }
  damaged: { key: number; value: { project: string; seq: number; line: string; reason: string } }
}

/** The part of the Web Locks API that is used; a test may bring its own. */
export type Locks = Pick<LockManager, 'request'>

export interface StoreOptions {
  name?: string
  locks?: Locks
}

const tables = ['projects', 'records', 'snapshots'] as const

/** All keys of one project in a store with keys [project, number]. */
function keysOf(project: string): IDBKeyRange {
  return IDBKeyRange.bound([project, 0], [project, Infinity])
}

export class JournalStore {
  readonly #db: IDBPDatabase<Tables>
  readonly #locks: Locks
  readonly #name: string
  /** Projects this tab may write, with what gives each back. */
  readonly #claimed = new Map<string, () => void>()
  /** Locks given back, or on their way: a lock asked for again must wait for that. */
  readonly #released = new Map<string, Promise<unknown>>()

  private constructor(db: IDBPDatabase<Tables>, locks: Locks, name: string) {
    this.#db = db
    this.#locks = locks
    this.#name = name
  }

  /** Rejects with a Fault when the browser gives no storage. */
  static async open({ name = 'winterclay', locks = navigator.locks }: StoreOptions = {}): Promise<JournalStore> {
    try {
      const db = await openDB<Tables>(name, 1, {
        upgrade(database) {
          database.createObjectStore('projects', { keyPath: 'id' })
          database.createObjectStore('records', { keyPath: ['project', 'seq'] })
          database.createObjectStore('snapshots', { keyPath: ['project', 'version'] })
          database.createObjectStore('damaged', { autoIncrement: true })
        },
        // A newer program in another tab wants to upgrade: give way, so that it does not wait for ever.
        blocking: (_current, _blocked, event) => (event.target as IDBDatabase).close(),
      })
      return new JournalStore(db, locks, name)
    } catch (error) {
      throw storageFault(error, 'open its storage')
    }
  }

  close(): void {
    for (const release of this.#claimed.values()) release()
    this.#claimed.clear()
    this.#db.close()
  }

  /** All projects, the last changed first. */
  async list(): Promise<ProjectEntry[]> {
    try {
      const entries = await this.#db.getAll('projects')
      return entries.sort((a, b) => b.changed - a.changed)
    } catch (error) {
      throw storageFault(error, 'list the projects')
    }
  }

  /** Makes this tab the one that writes the project; false when another tab is. The claim ends with the tab. */
  async claimProject(id: string): Promise<boolean> {
    if (this.#claimed.has(id)) return true
    await this.#released.get(id)
    return new Promise((resolve, reject) => {
      const hold = (lock: Lock | null) => {
        resolve(lock !== null)
        if (!lock) return undefined
        // The lock is held until this promise resolves.
        return new Promise<void>((release) => this.#claimed.set(id, release))
      }
      const request = this.#locks.request(`${this.#name} project ${id}`, { ifAvailable: true }, hold)
      request.catch(reject)
      this.#released.set(
        id,
        request.catch(() => undefined),
      )
    })
  }

  releaseProject(id: string): void {
    this.#claimed.get(id)?.()
    this.#claimed.delete(id)
  }

  #mustBeClaimed(id: string): void {
    if (this.#claimed.has(id)) return
    const message = 'this project is open in another tab, which does the writing; close that tab, then reload this one'
    throw new Fault('conflict', 'project', id, message)
  }

  /** Stores a project with its journal, in place of what was kept under its id. Needs the claim. */
  async create(state: WorkbenchState): Promise<void> {
    const { id } = state.project
    this.#mustBeClaimed(id)
    try {
      const tx = this.#db.transaction(tables, 'readwrite', { durability: 'strict' })
      const records = tx.objectStore('records')
      const snapshots = tx.objectStore('snapshots')
      const writes: Promise<unknown>[] = [records.delete(keysOf(id)), snapshots.delete(keysOf(id))]
      for (const transaction of state.journal.slice(1)) writes.push(records.add(recordOf(id, transaction)))
      writes.push(snapshots.add({ project: id, version: state.version, line: encodeSnapshot(state) }))
      writes.push(tx.objectStore('projects').put(entryOf(state)))
      await completed(tx, writes)
    } catch (error) {
      throw storageFault(error, 'store the project')
    }
  }

  /**
   * Reads a project back. Where this tab holds the claim, dropped records are set aside so that new ones can take their
   * place. Rejects with a Fault when there is no such project.
   */
  async load(id: string): Promise<Recovered> {
    try {
      const tx = this.#db.transaction(tables, 'readonly')
      const [entry, records, snapshots] = await Promise.all([
        tx.objectStore('projects').get(id),
        tx.objectStore('records').getAll(keysOf(id)),
        tx.objectStore('snapshots').getAll(keysOf(id)),
      ])
      if (!entry) throw new Fault('conflict', 'project', id, `the browser keeps no project "${id}"`)
      const recovered = recover({ id, records, snapshots })
      if (recovered.dropped.length > 0 && this.#claimed.has(id)) await this.#setAside(id, recovered)
      return recovered
    } catch (error) {
      throw storageFault(error, 'read the project')
    }
  }

  async #setAside(id: string, { state, dropped }: Recovered): Promise<void> {
    const tx = this.#db.transaction(['records', 'snapshots', 'damaged', 'projects'], 'readwrite', {
      durability: 'strict',
    })
    for (const { what, seq, reason } of dropped) {
      if (what === 'past') continue
      const line =
        what === 'record'
          ? (await tx.objectStore('records').get([id, seq]))?.line
          : (await tx.objectStore('snapshots').get([id, seq]))?.line
      await tx.objectStore('damaged').add({ project: id, seq, line: line ?? '', reason })
      await tx.objectStore(what === 'record' ? 'records' : 'snapshots').delete([id, seq])
    }
    await tx.objectStore('projects').put(entryOf(state))
    await tx.done
  }

  /**
   * Appends the transactions that led to `state`, all or none. Resolves only once the storage transaction has completed
   * with strict durability: from then on the edits outlive the page, the browser and the power. Rejects with a Fault
   * otherwise. Several at once cost one wait for the disk, so that a fast counter does not run ahead of it.
   */
  async append(state: WorkbenchState, ...transactions: readonly Transaction[]): Promise<void> {
    const { id } = state.project
    this.#mustBeClaimed(id)
    try {
      const tx = this.#db.transaction(tables, 'readwrite', { durability: 'strict' })
      // `add`, not `put`: a record once written is never replaced.
      const records = tx.objectStore('records')
      const writes: Promise<unknown>[] = transactions.map((transaction) => records.add(recordOf(id, transaction)))
      writes.push(tx.objectStore('projects').put(entryOf(state)))
      if (transactions.some(({ seq }) => seq % snapshotEvery === 0)) {
        const snapshots = tx.objectStore('snapshots')
        const old = state.version - snapshotsKept * snapshotEvery
        writes.push(snapshots.delete(IDBKeyRange.bound([id, 0], [id, Math.max(0, old)])))
        writes.push(snapshots.put({ project: id, version: state.version, line: encodeSnapshot(state) }))
      }
      await completed(tx, writes)
    } catch (error) {
      throw storageFault(error, 'store the edit')
    }
  }

  /** Forgets a project for good. Needs the claim. */
  async remove(id: string): Promise<void> {
    this.#mustBeClaimed(id)
    try {
      const tx = this.#db.transaction(tables, 'readwrite', { durability: 'strict' })
      await completed(tx, [
        tx.objectStore('projects').delete(id),
        tx.objectStore('records').delete(keysOf(id)),
        tx.objectStore('snapshots').delete(keysOf(id)),
      ])
    } catch (error) {
      throw storageFault(error, 'remove the project')
    }
  }

  /** Asks the browser not to clear this page's storage when disk space runs low; false when it makes no promise. */
  async askToPersist(): Promise<boolean> {
    try {
      return await navigator.storage.persist()
    } catch {
      return false
    }
  }
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
