/**
 * Copies of scan files for the next visit, in the browser's IndexedDB (a bucket of their own where there are buckets, apart
 * from the edits: see journalStore.ts), by SHA-256. The browser keeps a Blob on disk beside
 * its database and hands it back unread, so a large scan costs no memory until its pixels are asked for.
 *
 * Exports: `ScanStore` — `ScanStore.open(name?)`, `keep(sha256, file, name)` (resolves once the copy is whole and on disk),
 * `find(sha256)` (null when none is kept), `list()`, `remove(sha256)`, `close()`. Failures reject with a Fault in words for
 * the user. Whoever opens a copy hashes it again, so a damaged one is found out there.
 */
import type { DBSchema, IDBPDatabase } from 'idb'
import { bucketFactory, openDatabase } from './buckets.ts'
import { storageFault } from './storageFault.ts'

export interface KeptScan {
  sha256: string
  file: Blob
  name: string
}

interface Tables extends DBSchema {
  scans: { key: string; value: KeptScan }
}

export class ScanStore {
  readonly #db: IDBPDatabase<Tables>

  private constructor(db: IDBPDatabase<Tables>) {
    this.#db = db
  }

  static async open(name = 'winterclay-scans'): Promise<ScanStore> {
    try {
      const factory = (await bucketFactory(name)) ?? indexedDB
      const db = await openDatabase<Tables>(factory, name, (database) => {
        database.createObjectStore('scans', { keyPath: 'sha256' })
      })
      return new ScanStore(db)
    } catch (error) {
      throw storageFault(error, 'open its storage of scans')
    }
  }

  close(): void {
    this.#db.close()
  }

  async keep(sha256: string, file: Blob, name: string): Promise<void> {
    const act = `keep a copy of ${name} (${(file.size / 1e6).toFixed(1)} MB)`
    try {
      const tx = this.#db.transaction('scans', 'readwrite', { durability: 'strict' })
      // Already there: the same bytes need not be written again, they may be hundreds of megabytes.
      const kept = await tx.store.get(sha256)
      if (kept?.file.size !== file.size) await tx.store.put({ sha256, file, name })
      await tx.done
    } catch (error) {
      throw storageFault(error, act)
    }
  }

  async find(sha256: string): Promise<KeptScan | null> {
    try {
      return (await this.#db.get('scans', sha256)) ?? null
    } catch (error) {
      throw storageFault(error, 'read the copy of a scan')
    }
  }

  async list(): Promise<{ sha256: string; name: string; bytes: number }[]> {
    try {
      const kept = await this.#db.getAll('scans')
      return kept.map(({ sha256, name, file }) => ({ sha256, name, bytes: file.size }))
    } catch (error) {
      throw storageFault(error, 'list the scans it keeps')
    }
  }

  async remove(sha256: string): Promise<void> {
    try {
      await this.#db.delete('scans', sha256)
    } catch (error) {
      throw storageFault(error, 'remove the copy of a scan')
    }
  }
}
