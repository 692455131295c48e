import { describe, expect, it } from 'vitest'
import { changeSpan } from '../../../src/commands/changeSpan.ts'
import { markBoundaries } from '../../../src/commands/markBoundaries.ts'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { removeSpan } from '../../../src/commands/removeSpan.ts'
import { importCounts } from '../../../src/commands/importCounts.ts'
import { countedBoundaries } from '../../../src/document/counted.ts'
import { undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { applyTransaction } from '../../../src/document/state.ts'
import { after, countedState, stampAt } from '../../fixtures/project.ts'

const transect = 'transect-1'

describe('markSpan', () => {
  it('lifts the boundaries of the count strictly inside, in one act that undo takes back', () => {
    const state = countedState([10, 20, 30, 40])
    const next = after(state, markSpan(state, { transect, from: 20, to: 40, kind: 'event', count: 'count-1' }))
    expect(next.project.spans).toEqual([{ id: 'span-1', transect, from: 20, to: 40, kind: 'event', note: '' }])
    expect(next.project.counts[0].layers.position).toEqual(Float64Array.of(10, 20, 40))
    expect(need(applyTransaction(next, undo(next, stampAt(9))!)).project).toEqual(state.project)
  })

  it('leaves the boundaries of other counts in place, and out of the reckoning', () => {
    let state = countedState([10, 20, 30, 40])
    const rows = [1.5, 2.5, 3.5].map((depthMm, i) => ({ line: i + 2, depthMm, mark: 'doubtful' as const }))
    state = after(state, importCounts(state, { transect, counterName: 'B', rows }))
    state = after(state, markSpan(state, { transect, from: 20, to: 30, kind: 'unreadable', count: 'count-1' }))
    expect(state.project.counts[1].layers.position).toEqual(Float64Array.of(15, 25, 35))
    expect(countedBoundaries(state.project, 'count-2')).toEqual({
      id: Uint32Array.of(1, 3),
      position: Float64Array.of(15, 35),
      doubtful: Uint8Array.of(1, 1),
    })
  })

  it('refuses overlap, an end above its top, and places off the transect', () => {
    let state = countedState([])
    state = after(state, markSpan(state, { transect, from: 20, to: 40, kind: 'event' }))
    expect(markSpan(state, { transect, from: 30, to: 50, kind: 'unreadable' })).toMatchObject({
      message: '30.0 px to 50.0 px overlaps an event bed (20.0 px to 40.0 px); change that one or stay clear of it',
    })
    expect(markSpan(state, { transect, from: 60, to: 60, kind: 'event' })).toMatchObject({
      message: 'an event bed must end below its top, 60.0 px; it ends at 60.0 px',
    })
    expect(markSpan(state, { transect, from: 60, to: 5000, kind: 'event' })).toMatchObject({
      message: 'to must lie on the transect, 0 to 4000.0 px; it is 5000.0 px',
    })
    expect(after(state, markSpan(state, { transect, from: 60, to: 60, kind: 'hiatus' })).project.spans).toHaveLength(2)
    expect(after(state, markSpan(state, { transect, from: 40, to: 45, kind: 'event' })).project.spans).toHaveLength(2)
  })
})

describe('changeSpan and removeSpan', () => {
  it('change edges, kind and note, lifting what comes to lie inside', () => {
    let state = countedState([10, 20, 30])
    state = after(state, markSpan(state, { transect, from: 12, to: 15, kind: 'event' }))
    state = after(state, changeSpan(state, { span: 'span-1', to: 25, note: 'flood', count: 'count-1' }))
    expect(state.project.spans[0]).toMatchObject({ from: 12, to: 25, note: 'flood' })
    expect(state.project.counts[0].layers.position).toEqual(Float64Array.of(10, 30))
    expect(changeSpan(state, { span: 'span-1', from: 26 })).toMatchObject({
      message: 'an event bed must end below its top, 26.0 px; it ends at 25.0 px',
    })
    expect(after(state, removeSpan(state, { span: 'span-1' })).project.spans).toEqual([])
    expect(removeSpan(state, { span: 'span-2' })).toMatchObject({ message: 'the project has no span "span-2"' })
  })
})

describe('countedBoundaries', () => {
  it('leaves rejected proposals out and tells doubtful ones', () => {
    let state = countedState([10, 20, 30])
    state = after(state, markBoundaries(state, { count: 'count-1', ids: [2], mark: 'rejected' }))
    state = after(state, markBoundaries(state, { count: 'count-1', ids: [3], mark: 'doubtful' }))
    expect(countedBoundaries(state.project, 'count-1')).toEqual({
      id: Uint32Array.of(1, 3),
      position: Float64Array.of(10, 30),
      doubtful: Uint8Array.of(0, 1),
    })
  })

  it('keeps those on the edges of a span, and those between two', () => {
    let state = countedState([10, 20, 25, 30, 40, 45])
    state = after(state, markSpan(state, { transect, from: 30, to: 41, kind: 'event' }))
    state = after(state, markSpan(state, { transect, from: 10, to: 20, kind: 'unreadable' }))
    expect(Array.from(countedBoundaries(state.project, 'count-1').position)).toEqual([10, 20, 25, 30, 45])
  })
})
