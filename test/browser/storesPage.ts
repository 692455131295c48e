import { acceptCandidates } from '../../src/commands/acceptCandidates.ts'
import { need } from '../../src/document/outcome.ts'
import { applyEdit } from '../../src/document/state.ts'
import { JournalStore } from '../../src/session/journalStore.ts'
import { ScanStore } from '../../src/session/scanStore.ts'
import { stampAt, startedState } from '../fixtures/project.ts'

const store = await JournalStore.open()
const scans = await ScanStore.open()
const id = startedState().project.id
const hash = 'cd'.repeat(32)

/** What an attempt ended with: `done`, or the words of its error. */
async function ending(attempt: Promise<unknown>): Promise<string> {
  try {
    await attempt
    return 'done'
  } catch (error) {
    return (error as Error).message
  }
}

/** Appends an edit that places so many boundaries after those that are there. */
async function edit(boundaries: number): Promise<void> {
  const { state } = await store.load(id)
  const last = state.project.counts[0].layers.position.at(-1) ?? 0
  const positions = Array.from({ length: boundaries }, (_, i) => last + 0.5 * (i + 1))
  const made = need(
    applyEdit(state, need(acceptCandidates(state, { count: 'count-1', positions })), stampAt(state.version)),
  )
  await store.append(made.state, made.transaction)
}

const stores = {
  claim: () => store.claimProject(id),
  /** Gives the project back and takes it up again at once. */
  reclaim() {
    store.releaseProject(id)
    return store.claimProject(id)
  },
  create: () => ending(store.create(startedState())),
  edit: () => ending(edit(1)),
  editLarge: () => ending(edit(6000)),
  version: async () => (await store.load(id)).state.version,
  keepScan: (bytes: number) => ending(scans.keep(hash, noise(bytes), 'lake.tif')),
  scanSize: async () => (await scans.find(hash))?.file.size,
}

/** Bytes that do not compress, so that the disk cannot make them fit. */
function noise(bytes: number): Blob {
  const block = 65_536
  const parts = Array.from({ length: Math.floor(bytes / block) }, () => crypto.getRandomValues(new Uint8Array(block)))
  return new Blob([...parts, crypto.getRandomValues(new Uint8Array(bytes % block))])
}

Object.assign(globalThis, { stores })
