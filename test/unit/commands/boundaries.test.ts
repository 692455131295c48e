import { describe, expect, it } from 'vitest'
import { acceptCandidates } from '../../../src/commands/acceptCandidates.ts'
import { markBoundaries } from '../../../src/commands/markBoundaries.ts'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { moveBoundaries } from '../../../src/commands/moveBoundaries.ts'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { rejectCandidates } from '../../../src/commands/rejectCandidates.ts'
import { removeBoundaries } from '../../../src/commands/removeBoundaries.ts'
import { setCheckedTo } from '../../../src/commands/setCheckedTo.ts'
import { columnsOf } from '../../../src/document/layerSet.ts'
import { need } from '../../../src/document/outcome.ts'
import type { Outcome } from '../../../src/document/outcome.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import type { Edit } from '../../../src/document/transaction.ts'
import { Fault } from '../../../worker/check.ts'
import { after, countedState } from '../../fixtures/project.ts'

const count = 'count-1'
const layersOf = (state: WorkbenchState) => columnsOf(state.project.counts[0].layers)
const positions = (state: WorkbenchState) => layersOf(state).position

function refusal(outcome: Outcome<Edit>): string {
  expect(outcome).toBeInstanceOf(Fault)
  return (outcome as Fault).message
}

/** Boundaries at 10 (certain), 20 (rejected), 30 (certain). */
function withRejected(): WorkbenchState {
  const state = countedState([10, 20, 30])
  return after(state, markBoundaries(state, { count, ids: [2], mark: 'rejected' }))
}

describe('placeBoundary', () => {
  it('sets a boundary that names the edit it came from', () => {
    const state = countedState([10, 30])
    const next = after(state, placeBoundary(state, { count, position: 20, mark: 'doubtful' }))
    expect(layersOf(next)).toEqual({
      id: [1, 3, 2],
      position: [10, 20, 30],
      mark: ['certain', 'doubtful', 'certain'],
      origin: [4, 5, 4],
    })
  })

  it('refuses to set one on another', () => {
    expect(refusal(placeBoundary(countedState([10, 30]), { count, position: 10.2 }))).toBe(
      'there is already a boundary at 10.0 px; move or remove that one instead of setting another on it',
    )
  })

  it('lets a rejected proposal give way', () => {
    const state = withRejected()
    const next = after(state, placeBoundary(state, { count, position: 20.1 }))
    expect(layersOf(next)).toMatchObject({ position: [10, 20.1, 30], mark: ['certain', 'certain', 'certain'] })
  })

  it('refuses places off the transect, no place at all, and an unknown count', () => {
    const state = countedState([10])
    expect(refusal(placeBoundary(state, { count, position: 4000.5 }))).toBe(
      'position must lie on the transect, 0 to 4000.0 px; it is 4000.5 px',
    )
    expect(refusal(placeBoundary(state, { count, position: NaN }))).toBe('position must be a finite number; it is NaN')
    expect(refusal(placeBoundary(state, { count: 'x', position: 5 }))).toBe('the project has no count "x"')
  })

  it('refuses the inside of an event bed, but not its edges', () => {
    let state = countedState([10])
    state = after(state, markSpan(state, { transect: 'transect-1', from: 50, to: 60, kind: 'event' }))
    expect(refusal(placeBoundary(state, { count, position: 55 }))).toBe(
      '55.0 px lies in an event bed (50.0 px to 60.0 px), which holds no countable years; remove or shorten that first',
    )
    state = after(state, placeBoundary(state, { count, position: 50 }))
    expect(positions(after(state, placeBoundary(state, { count, position: 60 })))).toEqual([10, 50, 60])
  })
})

describe('moveBoundaries', () => {
  it('moves several at once, keeping their order', () => {
    const state = countedState([10, 20, 30])
    const next = after(state, moveBoundaries(state, { count, ids: [1, 2], positions: [19, 25] }))
    expect(positions(next)).toEqual([19, 25, 30])
  })

  it('refuses to move one past or onto its neighbour', () => {
    const state = countedState([10, 20, 30])
    expect(refusal(moveBoundaries(state, { count, ids: [2], positions: [31] }))).toBe(
      'a boundary cannot be moved past its neighbour at 31.0 px; remove one of them first',
    )
    expect(refusal(moveBoundaries(state, { count, ids: [2], positions: [29.9] }))).toBe(
      'this would put a boundary on its neighbour at 29.9 px; remove one of them instead',
    )
  })

  it('lets rejected proposals in the way give way, and passes others', () => {
    const state = withRejected()
    const past = after(state, moveBoundaries(state, { count, ids: [1], positions: [25] }))
    expect(layersOf(past)).toMatchObject({ position: [20, 25, 30], mark: ['rejected', 'certain', 'certain'] })
    const onto = after(state, moveBoundaries(state, { count, ids: [1], positions: [20] }))
    expect(layersOf(onto)).toMatchObject({ id: [1, 3], position: [20, 30] })
  })

  it('refuses to move a rejected proposal onto any other boundary', () => {
    const state = withRejected()
    expect(refusal(moveBoundaries(state, { count, ids: [2], positions: [30.1] }))).toBe(
      'a boundary at 30.10 px would lie on the one at 30.00 px; ' +
        'boundaries must be 0.25 px apart and in order: move or remove that one first',
    )
    const both = after(state, markBoundaries(state, { count, ids: [1], mark: 'rejected' }))
    expect(moveBoundaries(both, { count, ids: [2], positions: [10] })).toBeInstanceOf(Fault)
  })

  it('has nothing to do when all stay where they are', () => {
    const state = countedState([10, 20])
    expect(need(moveBoundaries(state, { count, ids: [1, 2], positions: [10, 20] })).steps).toEqual([])
    expect(refusal(moveBoundaries(state, { count, ids: [1, 2], positions: [10] }))).toBe(
      'positions must be 2 long; it is Array of 1',
    )
  })
})

describe('removeBoundaries and markBoundaries', () => {
  it('take out and mark what is named', () => {
    const state = countedState([10, 20, 30])
    expect(positions(after(state, removeBoundaries(state, { count, ids: [3, 1] })))).toEqual([20])
    const marked = after(state, markBoundaries(state, { count, ids: [2, 3], mark: 'doubtful' }))
    expect(layersOf(marked)).toMatchObject({ mark: ['certain', 'doubtful', 'doubtful'], origin: [4, 5, 5] })
    const again = after(marked, markBoundaries(marked, { count, ids: [1, 2], mark: 'doubtful' }))
    expect(layersOf(again).origin).toEqual([6, 5, 5])
  })

  it('refuse what is not there', () => {
    const state = countedState([10])
    expect(refusal(removeBoundaries(state, { count, ids: [7] }))).toBe(
      'boundary 7 is not in this count, or is named twice',
    )
    expect(refusal(markBoundaries(state, { count, ids: [1, 1], mark: 'doubtful' }))).toBe(
      'boundary 1 is not in this count, or is named twice',
    )
  })
})

describe('acceptCandidates and rejectCandidates', () => {
  const cause = { job: 'ladder', method: 'ladder 1', recipe: { lanes: 9 }, seed: 3, inputHash: 'abc' }

  it('take many at once, in any order, with the computation they came from', () => {
    const state = countedState([10])
    const next = after(state, acceptCandidates(state, { count, positions: [40, 20, 30], mark: 'doubtful', cause }))
    expect(layersOf(next)).toMatchObject({
      position: [10, 20, 30, 40],
      mark: ['certain', 'doubtful', 'doubtful', 'doubtful'],
    })
    expect(next.journal.last).toMatchObject({ userEvent: 'accept', cause })
  })

  it('leave out what is decided already, doublets, and what lies in a span', () => {
    let state = withRejected()
    state = after(state, markSpan(state, { transect: 'transect-1', from: 50, to: 60, kind: 'unreadable' }))
    const edit = acceptCandidates(state, { count, positions: [10.1, 20, 28.5, 40, 40.1, 55], within: 2 })
    expect(positions(after(state, edit))).toEqual([10, 20, 30, 40])
    expect(need(acceptCandidates(state, { count, positions: [10, 20, 55] })).steps).toEqual([])
  })

  it('remember rejected ones', () => {
    const state = countedState([10])
    const next = after(state, rejectCandidates(state, { count, positions: [20, 10] }))
    expect(layersOf(next)).toMatchObject({ position: [10, 20], mark: ['certain', 'rejected'] })
  })

  it('refuse a place that is none', () => {
    expect(refusal(acceptCandidates(countedState([10]), { count, positions: [20, NaN] }))).toBe(
      'position must be a finite number; it is NaN',
    )
  })
})

describe('setCheckedTo', () => {
  it('records how far the counter has looked, and has nothing to do when it is so already', () => {
    const state = countedState([10])
    const next = after(state, setCheckedTo(state, { count, to: 12.5 }))
    expect(next.project.counts[0].checkedTo).toBe(12.5)
    expect(need(setCheckedTo(next, { count, to: 12.5 })).steps).toEqual([])
    expect(refusal(setCheckedTo(state, { count, to: -1 }))).toBe(
      'to must lie on the transect, 0 to 4000.0 px; it is -1.0 px',
    )
  })
})
