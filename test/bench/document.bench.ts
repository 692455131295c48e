import { bench, describe } from 'vitest'
import { markBoundaries } from '../../src/commands/markBoundaries.ts'
import { moveBoundaries } from '../../src/commands/moveBoundaries.ts'
import { placeBoundary } from '../../src/commands/placeBoundary.ts'
import { undo } from '../../src/document/history.ts'
import { encodeRecord, encodeSnapshot } from '../../src/document/journal.ts'
import { layersFromColumns, lift, move, place, remark } from '../../src/document/layerSet.ts'
import type { LayerSet } from '../../src/document/layerSet.ts'
import { need } from '../../src/document/outcome.ts'
import { recover } from '../../src/document/recover.ts'
import { applyEdit, applyTransaction } from '../../src/document/state.ts'
import type { WorkbenchState } from '../../src/document/state.ts'
import { stampAt, startedState } from '../fixtures/project.ts'

/*
 * What an edit costs at 20,000 boundaries, and what opening a project of 20,000 edits costs. Run by hand:
 *   npx vitest bench --run test/bench/document.bench.ts
 * Every result is kept in `consumed`, so that nothing is optimised away.
 */

const boundaries = 20_000

function manyLayers(): LayerSet {
  const indices = Array.from({ length: boundaries }, (_, i) => i)
  return layersFromColumns({
    id: indices.map((i) => i + 1),
    // A transect of 4,000 px has room for 16,000 boundaries at the least gap; here the length of the path is not asked.
    position: indices.map((i) => i * 0.5),
    mark: indices.map(() => 'certain'),
    origin: indices.map(() => 3),
  })
}

const layers = manyLayers()
const started = startedState()
const path = [
  { x: 0, y: 150 },
  { x: 20_000, y: 150 },
] as WorkbenchState['project']['transects'][number]['points']
const state: WorkbenchState = {
  ...started,
  project: {
    ...started.project,
    transects: [{ ...started.project.transects[0], points: path }],
    counts: [{ ...started.project.counts[0], layers }],
  },
}
const count = 'count-1'
const stamp = stampAt(9)
let consumed: unknown = null

/** Edit and undo, so that every round starts alike. */
function thereAndBack(edit: Parameters<typeof applyEdit>[1]): void {
  const there = need(applyEdit(state, edit, stamp)).state
  consumed = need(applyTransaction(there, undo(there, stamp)!))
}

describe('the columns of 20,000 boundaries', () => {
  const added = { id: [99_999], position: [5000.25], mark: ['certain' as const], origin: [4] }
  bench('place one', () => void (consumed = place(layers, added)))
  bench('lift one', () => void (consumed = lift(layers, [10_000])))
  bench('move one', () => void (consumed = move(layers, [10_000], [4999.6], [4])))
  bench('mark one', () => void (consumed = remark(layers, [10_000], ['doubtful'], [4])))
})

describe('a whole edit at 20,000 boundaries: command, transaction, new state', () => {
  const make = {
    place: () => need(placeBoundary(state, { count, position: 5000.25 })),
    move: () => need(moveBoundaries(state, { count, ids: [10_000], positions: [4999.6] })),
    mark: () => need(markBoundaries(state, { count, ids: [10_000], mark: 'doubtful' })),
  }
  bench('place', () => void (consumed = need(applyEdit(state, make.place(), stamp))))
  bench('move', () => void (consumed = need(applyEdit(state, make.move(), stamp))))
  bench('mark', () => void (consumed = need(applyEdit(state, make.mark(), stamp))))
  bench('place and undo', () => {
    thereAndBack(make.place())
  })
})

describe('storing and opening', () => {
  const edit = need(applyEdit(state, need(placeBoundary(state, { count, position: 5000.25 })), stamp)).transaction
  bench('encode one edit', () => void (consumed = encodeRecord(edit)))
  bench('encode a snapshot of 20,000 boundaries', () => void (consumed = encodeSnapshot(state)), { time: 2000 })

  let grown: WorkbenchState = {
    ...started,
    project: { ...started.project, transects: [{ ...started.project.transects[0], points: path }] },
  }
  const records: { seq: number; schema: number; line: string }[] = []
  for (const transaction of started.journal.slice(1)) {
    records.push({ seq: transaction.seq, schema: 1, line: encodeRecord(transaction) })
  }
  // Boundaries one by one, as a counter sets them.
  for (let i = 0; i < 7000; i++) {
    const made = need(applyEdit(grown, need(placeBoundary(grown, { count, position: 0.5 * i })), stamp))
    grown = made.state
    records.push({ seq: made.transaction.seq, schema: 1, line: encodeRecord(made.transaction) })
  }
  const kept = { id: 'project-1', records }
  bench('recover 7,000 edits from the journal alone', () => void (consumed = recover({ ...kept, snapshots: [] })), {
    time: 3000,
  })
  const snapshots = [{ version: grown.version, line: encodeSnapshot(grown) }]
  bench('recover 7,000 edits with a snapshot', () => void (consumed = recover({ ...kept, snapshots })), { time: 2000 })
})

process.on('exit', () => {
  if (consumed === null) throw new Error('nothing was measured')
})
