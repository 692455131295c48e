/**
 * Projects in the browser's IndexedDB: every transaction as one record, a snapshot every 200, one writing tab at a time.
 *
 * Exports: `JournalStore` —
 * `JournalStore.open(options?)`, `list()`, `claimProject(id)` (true: this tab may write), `releaseProject(id)`,
 * `create(state)` (a new or opened project with all its journal), `load(id)` (state and what was dropped),
 * `append(state, ...transactions)` (resolves once the records are on disk), `remove(id)`, `askToPersist()`, `close()`.
 * The rows of the database: journalTable.ts.
 *
 * Where the browser has storage buckets (Chromium), everything is written twice, into two stores one after the other, and
 * an edit counts as saved when both have it. The reason: Chromium's store (LevelDB) goes on writing to its log where a killed
 * process left it. When the kill came between the head and the body of a log entry, the next start but one finds a broken
 * log and clears the whole store of the site, edits of weeks included. This was seen once in 200 kills. A kill hits one of
 * two stores that are never written at the same time, and each opening of a project brings the other back in step.
 */
import { Fault } from '../../worker/check.ts'
import { encodeRecord } from '../document/journal.ts'
import { recover } from '../document/recover.ts'
import type { Recovered } from '../document/recover.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Transaction } from '../document/transaction.ts'
import { bucketFactory } from './buckets.ts'
import { JournalTable } from './journalTable.ts'
import type { KeptProject, ProjectEntry } from './journalTable.ts'
import { storageFault } from './storageFault.ts'

export type { ProjectEntry } from './journalTable.ts'

/** The part of the Web Locks API that is used; a test may bring its own. */
export type Locks = Pick<LockManager, 'request'>

export interface StoreOptions {
  name?: string
  locks?: Locks
  /** Where the databases are opened, one after the other in order of writing; default: the site's store and a bucket. */
  factories?: readonly IDBFactory[]
}

async function defaultFactories(name: string): Promise<IDBFactory[]> {
  const mirror = await bucketFactory(`${name}-mirror`)
  return mirror ? [indexedDB, mirror] : [indexedDB]
}

/** Tells storage errors in words for the person at the bench; `act` completes "the browser could not …". */
async function told<T>(act: string, work: () => Promise<T>): Promise<T> {
  try {
    return await work()
  } catch (error) {
    throw storageFault(error, act)
  }
}

export class JournalStore {
  /** The same rows in each, but for what a kill kept from the later ones. */
  readonly #copies: readonly JournalTable[]
  readonly #locks: Locks
  readonly #name: string
  /** Projects this tab may write, with what gives each back. */
  readonly #claimed = new Map<string, () => void>()
  /** Locks given back, or on their way: a lock asked for again must wait for that. */
  readonly #released = new Map<string, Promise<unknown>>()

  private constructor(copies: readonly JournalTable[], locks: Locks, name: string) {
    this.#copies = copies
    this.#locks = locks
    this.#name = name
  }

  /** Rejects with a Fault when the browser gives no storage. */
  static open({ name = 'winterclay', locks = navigator.locks, factories }: StoreOptions = {}): Promise<JournalStore> {
    return told('open its storage', async () => {
      const tried = (factories ?? (await defaultFactories(name))).map((factory) => JournalTable.open(factory, name))
      const copies: JournalTable[] = []
      const failures: unknown[] = []
      for (const outcome of await Promise.allSettled(tried)) {
        if (outcome.status === 'fulfilled') copies.push(outcome.value)
        else failures.push(outcome.reason)
      }
      // One that does not open must not keep the other from being read; it is brought in step when it opens again.
      if (copies.length === 0) throw failures[0]
      return new JournalStore(copies, locks, name)
    })
  }

  close(): void {
    for (const release of this.#claimed.values()) release()
    this.#claimed.clear()
    for (const copy of this.#copies) copy.close()
  }

  /** All projects, the last changed first. */
  list(): Promise<ProjectEntry[]> {
    return told('list the projects', async () => {
      const newest = new Map<string, ProjectEntry>()
      for (const entries of await Promise.all(this.#copies.map((copy) => copy.entries()))) {
        for (const entry of entries) {
          const known = newest.get(entry.id)
          if (!known || entry.version > known.version) newest.set(entry.id, entry)
        }
      }
      return [...newest.values()].sort((a, b) => b.changed - a.changed)
    })
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
  create(state: WorkbenchState): Promise<void> {
    return told('store the project', async () => {
      this.#mustBeClaimed(state.project.id)
      for (const copy of this.#copies) await copy.write(state)
    })
  }

  /**
   * Reads a project back from the copy that has most of it. Where this tab holds the claim, the copies are brought in step
   * and dropped records set aside, so that new ones can take their place. Rejects with a Fault when there is no such project.
   */
  load(id: string): Promise<Recovered> {
    return told('read the project', async () => {
      const kept = await Promise.all(this.#copies.map((copy) => copy.read(id)))
      const best = bestOf(id, kept)
      if (!best) throw new Fault('conflict', 'project', id, `the browser keeps no project "${id}"`)
      if (this.#claimed.has(id)) await this.#bringInStep(id, best, kept)
      return best.recovered
    })
  }

  async #bringInStep(id: string, { recovered, from }: Best, kept: readonly (KeptProject | null)[]): Promise<void> {
    const { state, dropped } = recovered
    if (dropped.length > 0) await this.#copies[from].setAside(id, recovered)
    for (const [i, copy] of this.#copies.entries()) {
      if (i === from) continue
      const missing = missingFrom(kept[i], state)
      if (missing === null) await copy.write(state)
      else if (missing.length > 0) await copy.append(state, missing)
    }
  }

  /**
   * Appends the transactions that led to `state`, all or none. Resolves only once the storage transactions have completed
   * with strict durability: from then on the edits outlive the page, the browser and the power. Rejects with a Fault
   * otherwise, and may then be tried again. Several at once cost one wait for the disk, so that a fast counter does not run
   * ahead of it.
   */
  append(state: WorkbenchState, ...transactions: readonly Transaction[]): Promise<void> {
    return told('store the edit', async () => {
      this.#mustBeClaimed(state.project.id)
      // One after the other, never at the same time: a kill can then hit only one of them in the middle of a write.
      for (const copy of this.#copies) await copy.append(state, transactions)
    })
  }

  /** Forgets a project for good. Needs the claim. */
  remove(id: string): Promise<void> {
    return told('remove the project', async () => {
      this.#mustBeClaimed(id)
      for (const copy of this.#copies) await copy.remove(id)
    })
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

interface Best {
  recovered: Recovered
  /** Index of the copy it came from. */
  from: number
}

/** The copy that gives most of the project; a later one is only looked into where the first is wanting. */
function bestOf(id: string, kept: readonly (KeptProject | null)[]): Best | null {
  let best: Best | null = null
  for (const [from, copy] of kept.entries()) {
    if (!copy) continue
    const wanting = !best || best.recovered.dropped.length > 0 || best.recovered.state.version < copy.entry.version
    if (!wanting) continue
    const recovered = recover({ id, ...copy })
    if (!best || isBetter(recovered, best.recovered)) best = { recovered, from }
  }
  return best
}

function isBetter(one: Recovered, other: Recovered): boolean {
  if (one.state.version !== other.state.version) return one.state.version > other.state.version
  return one.dropped.length < other.dropped.length
}

/** The transactions a copy lacks; null when it is not simply the beginning of the journal and must be written anew. */
function missingFrom(copy: KeptProject | null, { journal, version }: WorkbenchState): Transaction[] | null {
  if (!copy || copy.snapshots.length === 0) return null
  const last = copy.records.at(-1)
  const first = journal.since + 1
  if (!last) return version === journal.since ? [] : null
  const whole = copy.records.length === last.seq - journal.since && copy.records[0].seq === first
  const known = journal.at(last.seq)
  if (!whole || last.seq > version || !known || encodeRecord(known) !== last.line) return null
  return journal.slice(last.seq + 1)
}
