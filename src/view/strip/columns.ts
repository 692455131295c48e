import { lowerBound, nearest } from '../sorted.ts'
import { visibleRange } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'

/** Marks closer together than this, CSS pixels, are drawn as a density instead of one by one. */
const leastSpacing = 2.5

/** Indices [from, to) of a sorted column of axis positions that lie in view, with `margin` CSS pixels beyond either edge. */
export function inView(view: Viewport, position: ArrayLike<number>, margin = 0): [from: number, to: number] {
  const [top, bottom] = visibleRange(view)
  const from = lowerBound(position, top - margin / view.scale)
  return [from, lowerBound(position, bottom + margin / view.scale, from)]
}

/** Whether the marks in view stand too close to be told apart. */
export function isDense(view: Viewport, position: ArrayLike<number>): boolean {
  const [from, to] = inView(view, position)
  if (to - from < 2) return false
  const spacing = ((position[to - 1] - position[from]) * view.scale) / (to - from - 1)
  return spacing < leastSpacing
}

/**
 * Calls `each` for the marks in view, at most one in each device row: of many marks in one row the first stands for all,
 * up to and without `end`.
 * Found by binary search, so that the cost follows the height of the window and not the length of the core.
 */
export function eachRow(
  view: Viewport,
  position: ArrayLike<number>,
  pixelRatio: number,
  each: (index: number, y: number, end: number) => void,
  margin = 2,
): void {
  const [from, to] = inView(view, position, margin)
  let i = from
  while (i < to) {
    const y = (position[i] - view.top) * view.scale
    const nextRow = (Math.floor(y * pixelRatio) + 1) / pixelRatio
    const end = Math.max(i + 1, lowerBound(position, nextRow / view.scale + view.top, i + 1, to))
    each(i, y, end)
    i = end
  }
}

/** Half width of the weighting by which a density is taken, CSS pixels: wide enough that single marks do not show as a comb. */
const densityReach = 12

/** Marks per CSS pixel that fill a lane: two and a half times the column's own mean, whatever part of it is on screen. */
export function fullDensity(view: Viewport, position: ArrayLike<number>): number {
  const last = position.length - 1
  return last < 1 ? 1 : (2.5 * last) / ((position[last] - position[0]) * view.scale)
}

/**
 * Marks per CSS pixel around each screen row, relative to `full` marks per pixel, 0 to 1; rows are `step` CSS pixels apart.
 * Every mark counts with a weight that falls off evenly on both sides.
 */
export function densityRows(view: Viewport, position: ArrayLike<number>, full: number, step: number): Float64Array {
  const rows = new Float64Array(Math.max(0, Math.ceil(view.height / step)))
  const reach = Math.max(1, Math.round(densityReach / step))
  // Marks in each row, with as many rows beyond either edge as the weighting reaches.
  const counts = new Float64Array(rows.length + 2 * reach)
  let from = lowerBound(position, (-reach * step) / view.scale + view.top)
  for (let k = 0; k < counts.length; k++) {
    const to = lowerBound(position, ((k - reach + 1) * step) / view.scale + view.top, from)
    counts[k] = to - from
    from = to
  }
  const rowOf = (axis: number) => Math.floor(((axis - view.top) * view.scale) / step)
  const first = position.length > 0 ? rowOf(position[0]) : 0
  const last = position.length > 0 ? rowOf(position[position.length - 1]) : -1
  for (let row = 0; row < rows.length; row++) {
    let sum = 0
    let weights = 0
    for (let d = -reach + 1; d < reach; d++) {
      if (row + d < first || row + d > last) continue
      sum += counts[row + reach + d] * (reach - Math.abs(d))
      weights += reach - Math.abs(d)
    }
    // Nothing is said about rows above the first mark and below the last.
    if (row >= first && row <= last && weights > 0 && full > 0) rows[row] = Math.min(1, sum / (weights * step) / full)
  }
  return rows
}

/** Index of the mark at an axis position, as far as the screen can tell; -1 where there is none. */
export function markAt(view: Viewport, position: ArrayLike<number>, axis: number): number {
  const index = nearest(position, axis)
  return index >= 0 && Math.abs(position[index] - axis) * view.scale < 0.5 ? index : -1
}
