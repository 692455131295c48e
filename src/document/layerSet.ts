/**
 * One count's boundaries as flat sorted columns, and the pure functions that edit them.
 *
 * Reading: `emptyLayers`, `layerCount`, `lowerBound(set, position)`, `nearest(set, position)`, `range(set, from, to)`,
 * `indexOfId(set, id)`, `nextLayerId(set)`, `markAt(set, index)`, `columnsOf(set)`, `pickColumns(set, indices)`.
 * Editing (each returns a new set and throws a Fault when the result would break the invariant):
 * `place(set, columns)`, `lift(set, ids)`, `move(set, ids, positions, origins)`, `remark(set, ids, marks, origins)`,
 * `layersFromColumns(columns)`.
 *
 * Invariant: positions ascend with at least `minimalGap` between neighbours, ids are unique.
 */
import { Fault } from '../../worker/check.ts'

/** How a counter marked a boundary. `rejected` remembers that a proposal was looked at and is none. */
export const marks = ['certain', 'doubtful', 'rejected'] as const
export type Mark = (typeof marks)[number]

/** Boundaries closer than this cannot be told apart on the scan, path pixels. */
export const minimalGap = 0.25

/**
 * One count's boundaries: columns of equal length [boundaries], sorted by position; copied on write.
 * 17 bytes a boundary, so that 20,000 of them are copied in tens of microseconds.
 */
export interface LayerSet {
  /** Stable id, unique within the count, from 1. */
  readonly id: Uint32Array
  /** Path pixels. */
  readonly position: Float64Array
  /** Index into `marks`. */
  readonly mark: Uint8Array
  /** Sequence number of the transaction that last set this boundary: its provenance. */
  readonly origin: Uint32Array
}

/** The same columns as plain lists: the form in which steps and files carry boundaries. */
export interface LayerColumns {
  readonly id: readonly number[]
  readonly position: readonly number[]
  readonly mark: readonly Mark[]
  readonly origin: readonly number[]
}

export const emptyLayers: LayerSet = {
  id: new Uint32Array(0),
  position: new Float64Array(0),
  mark: new Uint8Array(0),
  origin: new Uint32Array(0),
}

export function layerCount(set: LayerSet): number {
  return set.id.length
}

export function markAt(set: LayerSet, index: number): Mark {
  return marks[set.mark[index]]
}

/** Index of the first boundary at or below (older than) `position`; the length when there is none. */
export function lowerBound(set: LayerSet, position: number): number {
  let low = 0
  let high = set.position.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (set.position[middle] < position) low = middle + 1
    else high = middle
  }
  return low
}

/** Index of the boundary nearest to `position`, the younger of two equally near; -1 in an empty set. */
export function nearest(set: LayerSet, position: number): number {
  const below = lowerBound(set, position)
  if (below === 0) return set.position.length > 0 ? 0 : -1
  if (below === set.position.length) return below - 1
  return set.position[below] - position < position - set.position[below - 1] ? below : below - 1
}

/** Indices [start, end) of the boundaries with from <= position < to. */
export function range(set: LayerSet, from: number, to: number): [start: number, end: number] {
  const start = lowerBound(set, from)
  return [start, Math.max(start, lowerBound(set, to))]
}

/** Index of the boundary with this id; -1 when there is none. */
export function indexOfId(set: LayerSet, id: number): number {
  return set.id.indexOf(id)
}

/** An id no present boundary bears. */
export function nextLayerId(set: LayerSet): number {
  let largest = 0
  for (const id of set.id) if (id > largest) largest = id
  return largest + 1
}

export function columnsOf(set: LayerSet): LayerColumns {
  return {
    id: Array.from(set.id),
    position: Array.from(set.position),
    mark: Array.from(set.mark, (mark) => marks[mark]),
    origin: Array.from(set.origin),
  }
}

/** The boundaries at these indices, as columns in the given order. */
export function pickColumns(set: LayerSet, indices: readonly number[]): LayerColumns {
  return {
    id: indices.map((index) => set.id[index]),
    position: indices.map((index) => set.position[index]),
    mark: indices.map((index) => marks[set.mark[index]]),
    origin: indices.map((index) => set.origin[index]),
  }
}

export function layersFromColumns(columns: LayerColumns): LayerSet {
  return place(emptyLayers, columns)
}

/** The indices of these ids, in the order given. Throws a Fault for an unknown or repeated id. */
export function indicesOfIds(set: LayerSet, ids: readonly number[]): number[] {
  if (ids.length === 1) return [knownIndex(set.id.indexOf(ids[0]), ids[0])]
  const indexOf = new Map<number, number>()
  set.id.forEach((id, index) => indexOf.set(id, index))
  return ids.map((id) => {
    const index = knownIndex(indexOf.get(id) ?? -1, id)
    // Taken out, so that a second mention of the same id is found out.
    indexOf.delete(id)
    return index
  })
}

function knownIndex(index: number, id: number): number {
  if (index >= 0) return index
  throw new Fault('conflict', 'boundary', id, `boundary ${id} is not in this count, or is named twice`)
}

/** Adds boundaries, which must come sorted by position. */
export function place(set: LayerSet, added: LayerColumns): LayerSet {
  checkNewIds(set, added.id)
  checkAscending(added.position)
  const length = set.id.length + added.id.length
  const result = newColumns(length)
  let from = 0
  let to = 0
  for (let i = 0; i < added.id.length; i++) {
    const position = added.position[i] + 0
    const until = lowerBound(set, position)
    checkRoom(set, until, position)
    copyRows(set, from, until, result, to)
    to += until - from
    from = until
    result.id[to] = added.id[i]
    result.position[to] = position
    result.mark[to] = marks.indexOf(added.mark[i])
    result.origin[to] = added.origin[i]
    to++
  }
  copyRows(set, from, set.id.length, result, to)
  return result
}

/** Takes boundaries away. */
export function lift(set: LayerSet, ids: readonly number[]): LayerSet {
  const indices = indicesOfIds(set, ids).sort((a, b) => a - b)
  const result = newColumns(set.id.length - indices.length)
  let from = 0
  let to = 0
  for (const index of indices) {
    copyRows(set, from, index, result, to)
    to += index - from
    from = index + 1
  }
  copyRows(set, from, set.id.length, result, to)
  return result
}

/** Moves boundaries to new positions; they may pass one another, but may not land on one. */
export function move(
  set: LayerSet,
  ids: readonly number[],
  positions: readonly number[],
  origins: readonly number[],
): LayerSet {
  const indices = indicesOfIds(set, ids)
  positions.forEach(checkPosition)
  const position = set.position.slice()
  const origin = set.origin.slice()
  indices.forEach((index, i) => {
    position[index] = positions[i] + 0
    origin[index] = origins[i]
  })
  const inOrder = indices.every(
    (index) =>
      (index === 0 || position[index] - position[index - 1] >= minimalGap) &&
      (index === position.length - 1 || position[index + 1] - position[index] >= minimalGap),
  )
  if (inOrder) return { id: set.id, position, mark: set.mark, origin }
  const order = ids.map((_, i) => i).sort((a, b) => positions[a] - positions[b])
  return place(lift(set, ids), {
    id: order.map((i) => ids[i]),
    position: order.map((i) => positions[i]),
    mark: order.map((i) => marks[set.mark[indices[i]]]),
    origin: order.map((i) => origins[i]),
  })
}

/** Marks boundaries anew. */
export function remark(
  set: LayerSet,
  ids: readonly number[],
  newMarks: readonly Mark[],
  origins: readonly number[],
): LayerSet {
  const mark = set.mark.slice()
  const origin = set.origin.slice()
  indicesOfIds(set, ids).forEach((index, i) => {
    mark[index] = marks.indexOf(newMarks[i])
    origin[index] = origins[i]
  })
  return { id: set.id, position: set.position, mark, origin }
}

interface MutableColumns {
  id: Uint32Array
  position: Float64Array
  mark: Uint8Array
  origin: Uint32Array
}

function newColumns(length: number): MutableColumns {
  return {
    id: new Uint32Array(length),
    position: new Float64Array(length),
    mark: new Uint8Array(length),
    origin: new Uint32Array(length),
  }
}

/** Copies rows [start, end) of `source` to `target` from row `at` on. */
function copyRows(source: LayerSet, start: number, end: number, target: MutableColumns, at: number): void {
  if (start === end) return
  target.id.set(source.id.subarray(start, end), at)
  target.position.set(source.position.subarray(start, end), at)
  target.mark.set(source.mark.subarray(start, end), at)
  target.origin.set(source.origin.subarray(start, end), at)
}

function checkNewIds(set: LayerSet, ids: readonly number[]): void {
  const taken = ids.length === 1 ? null : new Set(set.id)
  for (const id of ids) {
    if (taken ? taken.has(id) : set.id.includes(id)) {
      throw new Fault('conflict', 'boundary', id, `boundary ${id} is already in this count`)
    }
    taken?.add(id)
  }
}

function checkPosition(position: number): void {
  if (!Number.isFinite(position)) {
    throw new Fault(
      'argument',
      'position',
      position,
      `a boundary's position must be a finite number; it is ${position}`,
    )
  }
}

function checkAscending(positions: readonly number[]): void {
  positions.forEach((position, i) => {
    checkPosition(position)
    if (i > 0 && !(position - positions[i - 1] >= minimalGap)) throw tooClose(position, positions[i - 1])
  })
}

function checkRoom(set: LayerSet, index: number, position: number): void {
  if (index > 0 && !(position - set.position[index - 1] >= minimalGap)) {
    throw tooClose(position, set.position[index - 1])
  }
  if (index < set.position.length && !(set.position[index] - position >= minimalGap)) {
    throw tooClose(position, set.position[index])
  }
}

function tooClose(position: number, other: number): Fault {
  return new Fault(
    'conflict',
    'position',
    position,
    `a boundary at ${position.toFixed(2)} px would lie on the one at ${other.toFixed(2)} px; ` +
      `boundaries must be ${minimalGap} px apart and in order: move or remove that one first`,
  )
}
