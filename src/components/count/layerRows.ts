import { marks } from '../../document/layerSet.ts'
import type { LayerSet, Mark } from '../../document/layerSet.ts'

/** One line of the layer table. */
export interface LayerRow {
  /** Index in the layer set. */
  index: number
  id: number
  /** Varve number from the top; null for a rejected proposal. */
  year: number | null
  /** Path pixels. */
  position: number
  /** Distance to the counted boundary above, path pixels; null for the first and for rejected ones. */
  thickness: number | null
  mark: Mark
}

/** Year, upper neighbour and thickness of every boundary. */
export interface Numbering {
  year: Uint32Array
  above: Int32Array
  /** Path pixels; NaN for the first and for rejected ones. */
  thickness: Float64Array
}

export interface RowFilter {
  marks: 'counted' | 'doubtful' | 'rejected'
  /** Only layers thinner or thicker than this, path pixels; null: all. */
  limit: { than: 'thinner' | 'thicker'; thickness: number } | null
}

export interface RowOrder {
  by: 'depth' | 'thickness'
  descending: boolean
}

const rejected = marks.indexOf('rejected')
const doubtful = marks.indexOf('doubtful')

/** Varve number, upper neighbour and thickness of every boundary, in one pass: columns [boundaries]. */
export function numbering(layers: LayerSet): Numbering {
  const year = new Uint32Array(layers.mark.length)
  const above = new Int32Array(layers.mark.length).fill(-1)
  const thickness = new Float64Array(layers.mark.length).fill(NaN)
  let count = 0
  let last = -1
  for (let index = 0; index < layers.mark.length; index++) {
    if (layers.mark[index] === rejected) continue
    year[index] = ++count
    above[index] = last
    if (last >= 0) thickness[index] = layers.position[index] - layers.position[last]
    last = index
  }
  return { year, above, thickness }
}

/** Indices of the boundaries a filter shows, in the order asked for; layers without a thickness come last. */
export function rowIndices(
  layers: LayerSet,
  { thickness }: Numbering,
  filter: RowFilter,
  order: RowOrder,
): Uint32Array {
  const found = new Uint32Array(layers.mark.length)
  let length = 0
  for (let index = 0; index < found.length; index++) {
    if (hasMark(layers.mark[index], filter.marks) && isWithin(thickness[index], filter.limit)) found[length++] = index
  }
  const indices = found.subarray(0, length)
  const sign = order.descending ? -1 : 1
  if (order.by === 'depth') return order.descending ? indices.reverse() : indices
  return indices.sort((a, b) => {
    const difference = thickness[a] - thickness[b]
    if (Number.isNaN(difference))
      return Number(Number.isNaN(thickness[a])) - Number(Number.isNaN(thickness[b])) || a - b
    return sign * difference || a - b
  })
}

function hasMark(mark: number, wanted: RowFilter['marks']): boolean {
  if (wanted === 'counted') return mark !== rejected
  return mark === (wanted === 'doubtful' ? doubtful : rejected)
}

function isWithin(thickness: number, limit: RowFilter['limit']): boolean {
  if (!limit) return true
  return limit.than === 'thinner' ? thickness < limit.thickness : thickness > limit.thickness
}

export function rowAt(layers: LayerSet, numbers: Numbering, index: number): LayerRow {
  const mark = marks[layers.mark[index]]
  const thickness = numbers.thickness[index]
  return {
    index,
    id: layers.id[index],
    year: mark === 'rejected' ? null : numbers.year[index],
    position: layers.position[index],
    thickness: Number.isNaN(thickness) ? null : thickness,
    mark,
  }
}
