import { describe, expect, it } from 'vitest'
import { numbering, rowAt, rowIndices } from '../../src/components/count/layerRows.ts'
import type { RowFilter, RowOrder } from '../../src/components/count/layerRows.ts'
import { layersFromColumns } from '../../src/document/layerSet.ts'

const layers = layersFromColumns({
  id: [1, 2, 3, 4, 5],
  position: [10, 14, 16, 30, 37],
  mark: ['certain', 'doubtful', 'rejected', 'certain', 'certain'],
  origin: [1, 1, 1, 1, 1],
})
const numbers = numbering(layers)
const downcore: RowOrder = { by: 'depth', descending: false }
const rows = (filter: RowFilter, order = downcore) => Array.from(rowIndices(layers, numbers, filter, order))

describe('the layer table', () => {
  it('numbers years from the top and measures over rejected boundaries', () => {
    expect(rowAt(layers, numbers, 3)).toMatchObject({ year: 3, thickness: 16, mark: 'certain' })
    expect(rowAt(layers, numbers, 2)).toMatchObject({ year: null, thickness: null, mark: 'rejected' })
    expect(rowAt(layers, numbers, 0).thickness).toBeNull()
  })
  it('filters by mark and by thickness', () => {
    expect(rows({ marks: 'counted', limit: null })).toEqual([0, 1, 3, 4])
    expect(rows({ marks: 'doubtful', limit: null })).toEqual([1])
    expect(rows({ marks: 'rejected', limit: null })).toEqual([2])
    expect(rows({ marks: 'counted', limit: { than: 'thinner', thickness: 7 } })).toEqual([1])
    expect(rows({ marks: 'counted', limit: { than: 'thicker', thickness: 4 } })).toEqual([3, 4])
  })
  it('sorts by depth and by thickness either way, layers without a thickness last', () => {
    const all: RowFilter = { marks: 'counted', limit: null }
    expect(rows(all, { by: 'depth', descending: true })).toEqual([4, 3, 1, 0])
    expect(rows(all, { by: 'thickness', descending: false })).toEqual([1, 4, 3, 0])
    expect(rows(all, { by: 'thickness', descending: true })).toEqual([3, 4, 1, 0])
  })
})
