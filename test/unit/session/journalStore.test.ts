import 'fake-indexeddb/auto'
import { openDB } from 'idb'
import { afterEach, describe, expect, it } from 'vitest'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { reviseCore } from '../../../src/commands/reviseCore.ts'
import { undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { applyEdit, applyTransaction, newState } from '../../../src/document/state.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import { JournalStore, snapshotEvery } from '../../../src/session/journalStore.ts'
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

  it('never replaces a record: a second one of the same number is refused', async () => {
    const { store } = await openStore()
    await store.claimProject('project-1')
    const state = startedState()
    await store.create(state)
    await count(store, state, 1)
    await expect(count(store, state, 1)).rejects.toThrow(
      'the browser could not store the edit: another tab has stored something in its place. Save a project file, then reload the page',
    )
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
