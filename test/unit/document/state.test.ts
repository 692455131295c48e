import { describe, expect, it } from 'vitest'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { applyTransaction, replay, newState } from '../../../src/document/state.ts'
import { need } from '../../../src/document/outcome.ts'
import { createTransaction } from '../../../src/document/transaction.ts'
import { Fault } from '../../../worker/check.ts'
import { after, countedState, stampAt, startedState } from '../../fixtures/project.ts'

describe('applyTransaction', () => {
  it('refuses a transaction that starts from any version but the current one and leaves the state alone', () => {
    const state = countedState([10, 20, 30])
    const stale = createTransaction(
      state.version - 1,
      need(placeBoundary(state, { count: 'count-1', position: 50 })),
      stampAt(9),
    )
    const answer = applyTransaction(state, stale)
    expect(answer).toBeInstanceOf(Fault)
    expect((answer as Fault).code).toBe('conflict')
    expect((answer as Fault).message).toBe(
      'this edit starts from version 3 of the project, which is at 4; make it again',
    )
    expect(state.project.counts[0].layers.position).toEqual(Float64Array.of(10, 20, 30))
  })

  it('lets an older state go on another way without changing the newer one', () => {
    const state = startedState()
    const left = after(state, placeBoundary(state, { count: 'count-1', position: 50 }))
    const right = after(state, placeBoundary(state, { count: 'count-1', position: 70 }))
    expect(left.journal.last).not.toEqual(right.journal.last)
    expect(left.journal.at(4)?.steps[0]).toMatchObject({ kind: 'place', layers: { position: [50] } })
    expect(right.journal.at(4)?.steps[0]).toMatchObject({ kind: 'place', layers: { position: [70] } })
  })

  it('arrives at the same project when every transaction is replayed from nothing', () => {
    const state = countedState([10, 20, 30])
    const again = need(replay(newState('project-1'), state.journal.slice(1)))
    expect(again.project).toEqual(state.project)
    expect(again.version).toBe(4)
  })

  it('names the transaction that does not fit in replay', () => {
    const state = countedState([10, 20, 30])
    const [first, , third] = state.journal.slice(1)
    const answer = replay(newState('project-1'), [
      first,
      { ...third, seq: 2, base: 1, steps: [{ kind: 'check', count: 'count-9', before: 0, after: 1 }] },
    ])
    expect((answer as Fault).message).toBe('transaction 2: the project has no count "count-9"')
  })
})
