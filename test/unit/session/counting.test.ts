import { describe, expect, it } from 'vitest'
import { layersFromColumns } from '../../../src/document/layerSet.ts'
import type { LayerSet, Mark } from '../../../src/document/layerSet.ts'
import { mostInformative } from '../../../src/session/informative.ts'
import { openProposals } from '../../../src/session/proposals.ts'
import { layerBelow, splitPlace } from '../../../src/session/splitPlace.ts'
import type { Ladder } from '../../../worker/core/ladder.ts'

function layersAt(position: number[], mark: Mark[] = position.map(() => 'certain')): LayerSet {
  return layersFromColumns({ id: position.map((_, i) => i + 1), position, mark, origin: position.map(() => 1) })
}

/** Only the columns that proposals are made of. */
function ladderAt(position: number[], probability: number[]): Ladder {
  return {
    position: Float64Array.from(position),
    probability: Float64Array.from(probability),
    chosen: Uint8Array.from(probability, (one) => (one > 0.5 ? 1 : 0)),
    thickness: Float64Array.from(position, () => 10),
  } as Partial<Ladder> as Ladder
}

const none = openProposals(ladderAt([], []), layersAt([]))

describe('a split', () => {
  it('lies at the most probable candidate well inside the layer', () => {
    const open = openProposals(ladderAt([101, 104, 106, 109], [0.4, 0.1, 0.2, 0.45]), layersAt([]))
    expect(splitPlace(open, 100, 110)).toBe(106)
  })
  it('lies half way where there is no candidate', () => {
    expect(splitPlace(none, 100, 110)).toBe(105)
  })
})

describe('the layer below the cursor', () => {
  it('runs from the boundary under the cursor, or the one above it, to the next that counts', () => {
    const layers = layersAt([10, 20, 25, 30], ['certain', 'certain', 'rejected', 'certain'])
    expect(layerBelow(layers, none, 20, { kind: 'mark', index: 1, position: 20 })).toEqual([20, 30])
    expect(layerBelow(layers, none, 15, null)).toEqual([10, 20])
  })
  it('begins at the young end above the first boundary, and is none below the last', () => {
    expect(layerBelow(layersAt([10]), none, 4, null)).toEqual([0, 10])
    expect(layerBelow(layersAt([10]), none, 10, { kind: 'mark', index: 0, position: 10 })).toBeNull()
  })
})

describe('the least certain places', () => {
  const ladder = ladderAt([10, 20, 30, 40], [0.97, 0.55, 0.7, 0.3])
  it('come with p nearest one half first, those over 95 % not at all', () => {
    const layers = layersAt([])
    const places = mostInformative(ladder, layers, openProposals(ladder, layers))
    expect(places.map(({ position, kind }) => [position, kind])).toEqual([
      [20, 'open'],
      [30, 'open'],
      [40, 'open'],
    ])
  })
  it('hold confirmed boundaries at the place where they were confirmed, not doubtful or rejected ones', () => {
    const layers = layersAt([20.5, 30], ['certain', 'rejected'])
    const places = mostInformative(ladder, layers, openProposals(ladder, layers))
    expect(places.map(({ position, kind }) => [position, kind])).toEqual([
      [20.5, 'confirmed'],
      [40, 'open'],
    ])
  })
})
