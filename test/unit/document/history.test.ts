import { describe, expect, it } from 'vitest'
import { moveBoundaries } from '../../../src/commands/moveBoundaries.ts'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { reviseRecipe } from '../../../src/commands/reviseRecipe.ts'
import { canRedo, canUndo, mergeWindow, nextUndo, redo, undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import type { Outcome } from '../../../src/document/outcome.ts'
import { applyTransaction, newState } from '../../../src/document/state.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import type { Edit } from '../../../src/document/transaction.ts'
import { defaultRecipe } from '../../../worker/core/recipe.ts'
import { after, countedState, stampAt } from '../../fixtures/project.ts'

/** An edit this many milliseconds after the start, by whom. */
function at(state: WorkbenchState, time: number, edit: Outcome<Edit>, author = 'A'): WorkbenchState {
  return after(state, edit, { time: 1_800_000_000_000 + time, author })
}

const nudge = (state: WorkbenchState, id: number, position: number) =>
  moveBoundaries(state, { count: 'count-1', ids: [id], positions: [position] })
const positions = (state: WorkbenchState) => Array.from(state.project.counts[0].layers.position)
const undone = (state: WorkbenchState) => need(applyTransaction(state, undo(state, stampAt(state.version))!))
const redone = (state: WorkbenchState) => need(applyTransaction(state, redo(state, stampAt(state.version))!))

describe('undo', () => {
  it('takes back nudges of one boundary in quick succession together', () => {
    let state = countedState([10, 20, 30])
    state = at(state, 0, nudge(state, 2, 20.5))
    state = at(state, 400, nudge(state, 2, 21))
    state = at(state, 800, nudge(state, 2, 21.5))
    const back = undone(state)
    expect(positions(back)).toEqual([10, 20, 30])
    expect(back.journal.last?.steps).toHaveLength(1)
    expect(positions(redone(back))).toEqual([10, 21.5, 30])
  })

  it('takes back one by one what is far apart in time, of another boundary, or by another person', () => {
    let state = countedState([10, 20, 30])
    state = at(state, 0, nudge(state, 2, 20.5))
    state = at(state, mergeWindow + 1, nudge(state, 2, 21))
    expect(positions(undone(state))).toEqual([10, 20.5, 30])
    state = at(state, mergeWindow + 2, nudge(state, 1, 11))
    expect(positions(undone(state))).toEqual([10, 21, 30])
    state = at(state, mergeWindow + 3, nudge(state, 1, 12), 'B')
    expect(positions(undone(state))).toEqual([11, 21, 30])
  })

  it('takes back boundaries placed in quick succession one by one', () => {
    let state = countedState([10])
    state = at(state, 0, placeBoundary(state, { count: 'count-1', position: 20 }))
    state = at(state, 1, placeBoundary(state, { count: 'count-1', position: 30 }))
    expect(positions(undone(state))).toEqual([10, 20])
  })

  it('takes back the drag of a slider together', () => {
    let state = countedState([10])
    for (const [time, prominence] of [0.6, 0.7, 0.8].entries()) {
      const candidates = { ...defaultRecipe.candidates, prominence }
      state = at(
        state,
        time * 100,
        reviseRecipe(state, { section: 'section-1', recipe: { ...defaultRecipe, candidates } }),
      )
    }
    expect(undone(state).project.sections[0].recipe).toEqual(defaultRecipe)
  })

  it('adds to the journal and takes nothing out of it', () => {
    const state = countedState([10])
    const back = undone(state)
    expect(back.version).toBe(state.version + 1)
    expect(back.journal.slice(1, state.version)).toEqual(state.journal.slice(1))
    expect(back.journal.last).toMatchObject({ userEvent: 'undo', reverts: { from: 4, to: 4 } })
  })

  it('gives a boundary its earlier provenance back', () => {
    let state = countedState([10, 20])
    state = at(state, 0, nudge(state, 1, 11))
    expect(state.project.counts[0].layers.origin[0]).toBe(5)
    expect(undone(state).project.counts[0].layers.origin[0]).toBe(4)
  })

  it('ends where the project begins, and redo where nothing was undone or something else was done', () => {
    const empty = newState('p')
    expect(canUndo(empty)).toBe(false)
    expect(canRedo(empty)).toBe(false)
    let state = countedState([10])
    while (canUndo(state)) state = undone(state)
    expect(state.project).toEqual(newState('project-1').project)
    expect(canRedo(state)).toBe(true)
    const back = undone(countedState([10]))
    const other = after(back, placeBoundary(back, { count: 'count-1', position: 50 }))
    expect(canRedo(other)).toBe(false)
    expect(nextUndo(other.journal)).toEqual({ from: 6, to: 6 })
  })
})
