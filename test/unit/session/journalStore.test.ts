import 'fake-indexeddb/auto'
import { IDBFactory } from 'fake-indexeddb'
import { openDB, wrap } from 'idb'
import type { IDBPDatabase } from 'idb'
import { afterEach, describe, expect, it } from 'vitest'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { reviseCore } from '../../../src/commands/reviseCore.ts'
import { undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { applyEdit, applyTransaction, newState } from '../../../src/document/state.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import { JournalStore } from '../../../src/session/journalStore.ts'
import { JournalTable, snapshotEvery } from '../../../src/session/journalTable.ts'
import { inventedLocks } from '../../fixtures/locks.ts'
import { stampAt, startedState } from '../../fixtures/project.ts'

const opened: JournalStore[] = []
let databases = 0

async function openStore(name = `store-${++databases}`, locks = inventedLocks()) {
  const store = await JournalStore.open({ name, locks })
  opened.push(store)
  return { store, name, locks }
}

afterEach(() => {
  for (const store of opened.splice(0)) store.close()
})

/** Places boundaries one by one, storing each. */
async function count(store: JournalStore, state: WorkbenchState, places: number, from = 10): Promise<WorkbenchState> {
  let current = state
  for (let i = 0; i < places; i++) {
    const edit = need(placeBoundary(current, { count: 'count-1', position: from + i }))
    const made = need(applyEdit(current, edit, stampAt(current.version)))
    current = made.state
    await store.append(current, made.transaction)
  }
  return current
}

/** Changes the line of a kept record behind the store's back. */
async function alterRecord(name: string, seq: number, alter: (line: string) => string): Promise<void> {
  const db = await openDB(name)
  const row = (await db.get('records', ['project-1', seq])) as { line: string }
  await db.put('records', { ...row, line: alter(row.line) })
  db.close()
}

describe('JournalStore', () => {
  it('gives back the very state that was stored, with its whole journal, over several snapshots', async () => {
    const { store, name, locks } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    const state = await count(store, startedState(), 2 * snapshotEvery + 17)
    store.close()
    const { store: again } = await openStore(name, locks)
    const { state: loaded, dropped } = await again.load('project-1')
    expect(dropped).toEqual([])
    expect(loaded.project).toEqual(state.project)
    expect(loaded.version).toBe(state.version)
    expect(loaded.journal.slice(1)).toEqual(state.journal.slice(1))
  })

  it('can undo after loading what was done before', async () => {
    const { store } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    await count(store, startedState(), 2)
    const { state } = await store.load('project-1')
    const undone = need(applyTransaction(state, undo(state, stampAt(99))!))
    expect(undone.project.counts[0].layers.position).toEqual(Float64Array.of(10))
  })

  it('drops a torn last record, reports it, and takes new edits in its place', async () => {
    const { store, name } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    await count(store, startedState(), 5)
    await alterRecord(name, 8, (line) => line.slice(0, 60))
    const { state, dropped } = await store.load('project-1')
    expect(state.version).toBe(7)
    expect(dropped).toEqual([
      {
        what: 'record',
        seq: 8,
        reason: 'this transaction is torn or was altered: its checksum does not fit its content',
      },
    ])
    await count(store, state, 1, 500)
    const again = await store.load('project-1')
    expect(again.dropped).toEqual([])
    expect(again.state.project.counts[0].layers.position).toEqual(Float64Array.of(10, 11, 12, 13, 500))
  })

  it('drops what follows an altered record as well, and leaves it all in place while another tab writes', async () => {
    const { store, name, locks } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    await count(store, startedState(), 5)
    await alterRecord(name, 6, (line) => line.replace('"position":[12]', '"position":[13]'))
    const { store: onlooker } = await openStore(name, locks)
    for (let visit = 0; visit < 2; visit++) {
      const { state, dropped } = await onlooker.load('project-1')
      expect(state.version).toBe(5)
      expect(dropped.map(({ seq }) => seq)).toEqual([6, 7, 8])
      expect(dropped[1].reason).toBe('it follows record 6, which is lost')
    }
  })

  it('falls back on the snapshot before a damaged one and loses nothing', async () => {
    const { store, name } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    const state = await count(store, startedState(), snapshotEvery + 10)
    const db = await openDB(name)
    const row = (await db.get('snapshots', ['project-1', snapshotEvery])) as { line: string }
    await db.put('snapshots', { ...row, line: row.line.replace('"pass":1', '"pass":2') })
    db.close()
    const loaded = await store.load('project-1')
    expect(loaded.dropped.map(({ what, seq }) => `${what} ${seq}`)).toEqual([`snapshot ${snapshotEvery}`])
    expect(loaded.state.project).toEqual(state.project)
  })

  it('keeps the project when an old record is damaged, and says that it can no longer be undone', async () => {
    const { store, name } = await openStore()
    await store.claimProject('project-1')
    await store.create(startedState())
    const state = await count(store, startedState(), snapshotEvery)
    await alterRecord(name, 50, () => 'nonsense')
    const loaded = await store.load('project-1')
    expect(loaded.dropped.map(({ what, seq }) => `${what} ${seq}`)).toEqual(['past 50'])
    expect(loaded.state.project).toEqual(state.project)
    expect(loaded.state.journal.since).toBe(50)
  })

  it('lets one tab write at a time and tells the other', async () => {
    const { store, name, locks } = await openStore()
    const { store: second } = await openStore(name, locks)
    expect(await store.claimProject('project-1')).toBe(true)
    expect(await second.claimProject('project-1')).toBe(false)
    await store.create(startedState())
    await expect(second.create(startedState())).rejects.toThrow(
      'this project is open in another tab, which does the writing; close that tab, then reload this one',
    )
    store.releaseProject('project-1')
    expect(await store.claimProject('project-1')).toBe(true)
    store.releaseProject('project-1')
    await Promise.resolve()
    expect(await second.claimProject('project-1')).toBe(true)
  })

  it('never replaces a record: another of the same number is refused, the same again passed over', async () => {
    const { store } = await openStore()
    await store.claimProject('project-1')
    const state = startedState()
    await store.create(state)
    await count(store, state, 1)
    await count(store, state, 1)
    await expect(count(store, state, 1, 500)).rejects.toThrow(
      'the browser could not store the edit: another tab has stored something in its place. Save a project file, then reload the page',
    )
    expect((await store.load('project-1')).state.project.counts[0].layers.position).toEqual(Float64Array.of(10))
  })

  it('lists projects, the last changed first, and forgets one on demand', async () => {
    const { store } = await openStore()
    for (const [id, name, minute] of [
      ['p1', 'First', 1],
      ['p2', 'Second', 5],
    ] as const) {
      await store.claimProject(id)
      const state = newState(id)
      await store.create(need(applyEdit(state, need(reviseCore(state, { name })), stampAt(minute))).state)
    }
    expect((await store.list()).map(({ name }) => name)).toEqual(['Second', 'First'])
    await store.remove('p2')
    expect((await store.list()).map(({ id, version }) => `${id} at ${version}`)).toEqual(['p1 at 1'])
    await expect(store.load('p2')).rejects.toThrow('the browser keeps no project "p2"')
  })
})

describe('JournalStore over two stores', () => {
  /** A store over two factories, each as if on its own; `clear` empties one as a browser does with a damaged store. */
  function openTwo() {
    const factories = [new IDBFactory(), new IDBFactory()]
    const locks = inventedLocks()
    const open = async () => {
      const store = await JournalStore.open({ name: 'two', locks, factories })
      opened.push(store)
      await store.claimProject('project-1')
      return store
    }
    const clear = (which: number) => factories.splice(which, 1, new IDBFactory())
    const rows = async (which: number) => {
      const table = await JournalTable.open(factories[which], 'two')
      const kept = await table.read('project-1')
      table.close()
      return kept
    }
    const change = async (which: number, act: (db: IDBPDatabase) => Promise<void>) => {
      const db = await (wrap(factories[which].open('two')) as Promise<IDBPDatabase>)
      await act(db)
      db.close()
    }
    return { open, clear, rows, change }
  }

  it('keeps the same rows in both', async () => {
    const { open, rows } = openTwo()
    const store = await open()
    await store.create(startedState())
    await count(store, startedState(), 3)
    expect(await rows(0)).toEqual(await rows(1))
    expect((await rows(1))?.records.map(({ seq }) => seq)).toEqual([1, 2, 3, 4, 5, 6])
  })

  it.each([0, 1])('loses nothing when store %i is cleared, and fills it again', async (which) => {
    const { open, clear, rows } = openTwo()
    const store = await open()
    await store.create(startedState())
    const state = await count(store, startedState(), snapshotEvery + 3)
    store.close()
    clear(which)
    const again = await open()
    expect((await again.list()).map(({ version }) => version)).toEqual([state.version])
    const { state: loaded, dropped } = await again.load('project-1')
    expect([loaded, dropped]).toEqual([state, []])
    expect((await rows(which))?.records).toEqual((await rows(1 - which))?.records)
    const further = await count(again, loaded, 2, 1000)
    again.close()
    clear(1 - which)
    expect((await (await open()).load('project-1')).state).toEqual(further)
  })

  it('brings the second in step when a kill came between the two', async () => {
    const { open, rows, change } = openTwo()
    const store = await open()
    await store.create(startedState())
    const state = await count(store, startedState(), 3)
    store.close()
    await change(1, async (db) => {
      await db.delete('records', ['project-1', 6])
      await db.put('projects', { ...(await rows(0))!.entry, version: 5 })
    })
    expect((await rows(1))?.records).toHaveLength(5)
    const again = await open()
    expect((await again.load('project-1')).state).toEqual(state)
    expect(await rows(1)).toEqual(await rows(0))
  })

  it('goes by the sound copy when a record of the other is torn', async () => {
    const { open, change } = openTwo()
    const store = await open()
    await store.create(startedState())
    const state = await count(store, startedState(), 4)
    store.close()
    await change(0, async (db) => {
      const row = (await db.get('records', ['project-1', 5])) as { line: string }
      await db.put('records', { ...row, line: row.line.slice(0, 50) })
    })
    const again = await open()
    const { state: loaded, dropped } = await again.load('project-1')
    expect([loaded, dropped]).toEqual([state, []])
    again.close()
    const third = await open()
    expect((await third.load('project-1')).state).toEqual(state)
  })
})
