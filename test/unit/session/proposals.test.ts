import { describe, expect, it } from 'vitest'
import { emptyLayers, layersFromColumns } from '../../../src/document/layerSet.ts'
import type { LayerSet, Mark } from '../../../src/document/layerSet.ts'
import { nextStop, openProposals, stopAt } from '../../../src/session/proposals.ts'
import type { Ladder } from '../../../worker/core/ladder.ts'

/** The columns of a ladder that proposals are made of: a site every 10 px, those in `weak` not chosen. */
function ladder(sites: number, weak: number[] = []): Ladder {
  return {
    position: Float64Array.from({ length: sites }, (_, k) => 10 * (k + 1)),
    probability: Float64Array.from({ length: sites }, (_, k) => (weak.includes(k) ? 0.1 : 0.9)),
    chosen: Uint8Array.from({ length: sites }, (_, k) => (weak.includes(k) ? 0 : 1)),
    thickness: new Float64Array(sites).fill(10),
  } as Ladder
}
function layers(...rows: [position: number, mark: Mark][]): LayerSet {
  return layersFromColumns({
    id: rows.map((_, i) => i + 1),
    position: rows.map(([position]) => position),
    mark: rows.map(([, mark]) => mark),
    origin: rows.map(() => 1),
  })
}
const any = { marks: (mark: number) => mark !== 2, proposals: true }

describe('open proposals', () => {
  it('are all sites while nothing is marked', () => {
    expect([...openProposals(ladder(4), emptyLayers).position]).toEqual([10, 20, 30, 40])
  })

  it('are answered by a mark of any kind within a third of the local thickness, and by nothing farther off', () => {
    const open = openProposals(ladder(4), layers([13, 'certain'], [23.6, 'doubtful'], [29, 'rejected']))
    expect([...open.position]).toEqual([20, 40])
  })

  it('lose one chosen site to each mark, so that two layers close together stay two', () => {
    const close = { ...ladder(2), position: Float64Array.of(10, 12) }
    expect([...openProposals(close, layers([10.5, 'certain'])).position]).toEqual([12])
  })

  it('leave out sites that are all but impossible', () => {
    const faint = ladder(2, [1])
    faint.probability[1] = 0.001
    expect([...openProposals(faint, emptyLayers).position]).toEqual([10])
  })
})

describe('the cursor', () => {
  const set = layers([10, 'certain'], [25, 'doubtful'], [35, 'rejected'])
  const open = openProposals(ladder(5, [4]), set)

  it('visits boundaries and chosen proposals in their order, and passes over rejected and weak ones', () => {
    const visited: number[] = []
    for (let at = -1; ;) {
      const stop = nextStop(set, open, at, 1, any)
      if (!stop) break
      visited.push((at = stop.position))
    }
    expect(visited).toEqual([10, 20, 25, 30, 40])
  })

  it('goes back the way it came', () => {
    expect(nextStop(set, open, 25, -1, any)).toMatchObject({ kind: 'proposal', position: 20 })
    expect(nextStop(set, open, 10, -1, any)).toBeNull()
  })

  it('finds the doubtful ones alone when asked for them', () => {
    const doubtful = { marks: (mark: number) => mark === 1, proposals: false }
    expect(nextStop(set, open, -1, 1, doubtful)).toMatchObject({ kind: 'mark', index: 1 })
    expect(nextStop(set, open, 25, 1, doubtful)).toBeNull()
  })

  it('stands on the mark before the proposal at the same place, and on nothing in between', () => {
    expect(stopAt(set, open, 10.3, 0.5)).toMatchObject({ kind: 'mark', index: 0 })
    expect(stopAt(set, open, 20.2, 0.5)).toMatchObject({ kind: 'proposal' })
    expect(stopAt(set, open, 15, 0.5)).toBeNull()
  })
})
