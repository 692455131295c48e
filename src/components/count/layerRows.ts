import { marks } from '../../document/layerSet.ts'
import type { LayerSet, Mark } from '../../document/layerSet.ts'

/** One line of the layer table. */
export interface LayerRow {
  /** Index in the layer set. */
  index: number
  /** Varve number from the top; null for a rejected proposal. */
  year: number | null
  /** Path pixels. */
  position: number
  /** Distance to the counted boundary above, path pixels; null for the first and for rejected ones. */
  thickness: number | null
  mark: Mark
}

export type RowFilter = 'counted' | 'doubtful' | 'rejected'

const rejected = marks.indexOf('rejected')
const doubtful = marks.indexOf('doubtful')

/** Indices of the boundaries a filter shows. */
export function filteredIndices(layers: LayerSet, filter: RowFilter): Uint32Array {
  const wanted = {
    counted: (mark: number) => mark !== rejected,
    doubtful: (mark: number) => mark === doubtful,
    rejected: (mark: number) => mark === rejected,
  }[filter]
  const found: number[] = []
  layers.mark.forEach((mark, index) => {
    if (wanted(mark)) found.push(index)
  })
  return Uint32Array.from(found)
}

/** Varve number and upper neighbour of every boundary, in one pass: [boundaries]. */
export function numbering(layers: LayerSet): { year: Uint32Array; above: Int32Array } {
  const year = new Uint32Array(layers.mark.length)
  const above = new Int32Array(layers.mark.length).fill(-1)
  let count = 0
  let last = -1
  layers.mark.forEach((mark, index) => {
    if (mark === rejected) return
    year[index] = ++count
    above[index] = last
    last = index
  })
  return { year, above }
}

export function rowAt(layers: LayerSet, numbers: ReturnType<typeof numbering>, index: number): LayerRow {
  const mark = marks[layers.mark[index]]
  const above = numbers.above[index]
  return {
    index,
    year: mark === 'rejected' ? null : numbers.year[index],
    position: layers.position[index],
    thickness: mark === 'rejected' || above < 0 ? null : layers.position[index] - layers.position[above],
    mark,
  }
}
