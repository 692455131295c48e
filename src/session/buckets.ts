/**
 * Storage that stands apart. All databases of a site lie in one store on disk; where that store is damaged, a browser may
 * clear it as a whole. A storage bucket is a store of its own (Storage Buckets API, so far in Chromium only).
 *
 * Exports: `bucketFactory(name)` -> an IDBFactory of its own, or null where the browser has no buckets;
 * `openDatabase(factory, name, upgrade)`.
 */
import { wrap } from 'idb'
import type { DBSchema, IDBPDatabase } from 'idb'

/** The part of the Storage Buckets API that is used; the DOM types do not have it yet. */
interface Buckets {
  open(name: string, options: { durability: 'strict' }): Promise<{ indexedDB: IDBFactory }>
}

export async function bucketFactory(name: string): Promise<IDBFactory | null> {
  const site = globalThis.navigator as (Navigator & { storageBuckets?: Buckets }) | undefined
  if (!site?.storageBuckets) return null
  const bucket = await site.storageBuckets.open(name, { durability: 'strict' })
  return bucket.indexedDB
}

/** Opens version 1 of a database in a factory of choice; `upgrade` creates its stores. */
export function openDatabase<Tables extends DBSchema>(
  factory: IDBFactory,
  name: string,
  upgrade: (database: IDBPDatabase<Tables>) => void,
): Promise<IDBPDatabase<Tables>> {
  const request = factory.open(name, 1)
  request.addEventListener('upgradeneeded', () => upgrade(wrap(request.result) as IDBPDatabase<Tables>))
  request.addEventListener('success', () => {
    // A newer program in another tab wants to upgrade: give way, so that it does not wait for ever.
    request.result.addEventListener('versionchange', () => request.result.close())
  })
  return wrap(request) as Promise<IDBPDatabase<Tables>>
}
