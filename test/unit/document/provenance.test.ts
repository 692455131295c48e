import { describe, expect, it } from 'vitest'
import { acceptCandidates } from '../../../src/commands/acceptCandidates.ts'
import { importCounts } from '../../../src/commands/importCounts.ts'
import { markBoundaries } from '../../../src/commands/markBoundaries.ts'
import { moveBoundaries } from '../../../src/commands/moveBoundaries.ts'
import { removeBoundaries } from '../../../src/commands/removeBoundaries.ts'
import { undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { describeEvent, explainLayer } from '../../../src/document/provenance.ts'
import { applyTransaction, stateWithPast } from '../../../src/document/state.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import { after, stampAt, startedState } from '../../fixtures/project.ts'

const cause = { job: 'ladder', method: 'semi-Markov ladder 1', recipe: null, seed: null, inputHash: 'feedfacecafebeef' }

/** Accepted from a computation by A, moved by B, doubted by C. */
function contested(): WorkbenchState {
  let state = startedState()
  state = after(state, acceptCandidates(state, { count: 'count-1', positions: [10, 20], cause }), stampAt(10))
  state = after(state, moveBoundaries(state, { count: 'count-1', ids: [2], positions: [21] }), stampAt(11, 'B'))
  return after(state, markBoundaries(state, { count: 'count-1', ids: [2], mark: 'doubtful' }), stampAt(12, 'C'))
}

describe('explainLayer', () => {
  it('tells who set, moved and marked a boundary, newest first, and on what evidence', () => {
    const { events, complete, position, mark } = need(explainLayer(contested(), 'count-1', 2))
    expect([position, mark, complete]).toEqual([21, 'doubtful', true])
    expect(events.map(({ act, author, seq }) => `${act} by ${author} in ${seq}`)).toEqual([
      'marked by C in 6',
      'moved by B in 5',
      'placed by A in 4',
    ])
    expect(events[2].evidence).toEqual(cause)
    expect(events.map(describeEvent)).toEqual([
      'Marked doubtful by C on 2023-11-14 22:25 UTC, by own judgement (mark, edit 6).',
      'Moved to 21.0 px by B on 2023-11-14 22:24 UTC, by own judgement (move, edit 5).',
      'Placed at 20.0 px as certain by A on 2023-11-14 22:23 UTC, from ladder (semi-Markov ladder 1), input feedfacecafe (accept, edit 4).',
    ])
  })

  it('tells the same after the boundary was removed and the removal undone', () => {
    let state = contested()
    const before = need(explainLayer(state, 'count-1', 2))
    state = after(state, removeBoundaries(state, { count: 'count-1', ids: [2] }))
    state = need(applyTransaction(state, undo(state, stampAt(20))!))
    expect(need(explainLayer(state, 'count-1', 2))).toEqual(before)
  })

  it('tells an imported count by its import', () => {
    let state = startedState()
    const rows = [{ line: 2, depthMm: 5, mark: 'certain' as const }]
    state = after(state, importCounts(state, { transect: 'transect-1', counterName: 'B', rows }))
    const { events, complete } = need(explainLayer(state, 'count-2', 1))
    expect([complete, events.map(({ userEvent, position }) => [userEvent, position])]).toEqual([true, [['import', 50]]])
  })

  it('says when the journal does not reach back far enough', () => {
    const state = contested()
    const cut = need(stateWithPast(state.project, 4, state.journal.slice(5)))
    const { events, complete } = need(explainLayer(cut, 'count-1', 2))
    expect([events.length, complete]).toEqual([2, false])
  })

  it('refuses a boundary that is not there', () => {
    expect(explainLayer(contested(), 'count-1', 9)).toMatchObject({ message: 'boundary 9 is not in count-1' })
  })
})
