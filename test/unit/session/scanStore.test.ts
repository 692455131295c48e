import 'fake-indexeddb/auto'
import { describe, expect, it } from 'vitest'
import { ScanStore } from '../../../src/session/scanStore.ts'
import { storageFault } from '../../../src/session/storageFault.ts'

const hash = 'ab'.repeat(32)

describe('ScanStore', () => {
  it('gives a copy back by its hash, byte for byte, after being opened again', async () => {
    const store = await ScanStore.open('scans-1')
    await store.keep(hash, new Blob(['layers']), 'lake.tif')
    store.close()
    const again = await ScanStore.open('scans-1')
    const kept = await again.find(hash)
    expect(kept?.name).toBe('lake.tif')
    expect(await kept?.file.text()).toBe('layers')
    expect(await again.list()).toEqual([{ sha256: hash, name: 'lake.tif', bytes: 6 }])
    again.close()
  })

  it('keeps the first of two equal files, replaces one of another length, and forgets on demand', async () => {
    const store = await ScanStore.open('scans-2')
    await store.keep(hash, new Blob(['layers']), 'first.tif')
    await store.keep(hash, new Blob(['layers']), 'second.tif')
    expect((await store.find(hash))?.name).toBe('first.tif')
    await store.keep(hash, new Blob(['all layers']), 'third.tif')
    expect((await store.find(hash))?.name).toBe('third.tif')
    await store.remove(hash)
    expect(await store.find(hash)).toBeNull()
    store.close()
  })
})

describe('storageFault', () => {
  const words = (name: string) => storageFault(new DOMException('', name), 'store the edit').message

  it('says what to do when the storage is full, closed, forbidden or taken', () => {
    expect(words('QuotaExceededError')).toBe(
      'the browser could not store the edit: its storage is full. ' +
        'Free disk space, or save project files and remove projects you no longer need',
    )
    expect(words('InvalidStateError')).toBe(
      'the browser could not store the edit: its storage was closed or is damaged (InvalidStateError). ' +
        'Save a project file, then reload the page',
    )
    expect(words('SecurityError')).toBe(
      'the browser could not store the edit: it allows this page no storage (private window or blocked site data). ' +
        'Save a project file before closing',
    )
    expect(storageFault('odd', 'store the edit').message).toBe('the browser could not store the edit: odd')
  })
})
