import { projectToJson } from '../../src/document/parseProject.ts'
import type { Transaction } from '../../src/document/transaction.ts'
import { JournalStore } from '../../src/session/journalStore.ts'
import { startedState } from '../fixtures/project.ts'
import { steadyEdit } from '../fixtures/steadyEdits.ts'

/*
 * A page that reads its project back, says what it found, and then edits and stores without end, saying of each edit that
 * the store reported it saved. Whoever opened it kills it.
 */

/** What the page says, one JSON text in the console each. */
export type Report =
  | { said: 'loaded'; version: number; dropped: number; edits: number; project: unknown }
  | { said: 'saved'; version: number }

function say(report: Report): void {
  console.log(JSON.stringify(report))
}

const store = await JournalStore.open()
const id = startedState().project.id
if (!(await store.claimProject(id))) throw new Error('another tab holds the project')
if (!(await store.list()).some((entry) => entry.id === id)) await store.create(startedState())
const { state: loaded, dropped } = await store.load(id)
say({
  said: 'loaded',
  version: loaded.version,
  dropped: dropped.length,
  edits: loaded.journal.length,
  project: projectToJson(loaded.project),
})

for (let state = loaded; ;) {
  // One to three at a time, as the autosave hands them over when a counter is faster than the disk.
  const transactions: Transaction[] = []
  for (let i = 0; i <= state.version % 3; i++) {
    const made = steadyEdit(state)
    state = made.state
    transactions.push(made.transaction)
  }
  await store.append(state, ...transactions)
  say({ said: 'saved', version: state.version })
}
