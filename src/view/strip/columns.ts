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
 * Calls `each` for the marks in view, at most one in each device row: of many marks in one row the first stands for all.
 * Found by binary search, so that the cost follows the height of the window and not the length of the core.
 */
export function eachRow(
  view: Viewport,
  position: ArrayLike<number>,
  pixelRatio: number,
  each: (index: number, y: number) => void,
  margin = 2,
): void {
  const [from, to] = inView(view, position, margin)
  let i = from
  while (i < to) {
    const y = (position[i] - view.top) * view.scale
    each(i, y)
    const nextRow = (Math.floor(y * pixelRatio) + 1) / pixelRatio
    i = Math.max(i + 1, lowerBound(position, nextRow / view.scale + view.top, i + 1, to))
  }
}

/**
 * Marks per CSS pixel around each screen row, relative to `full` marks per pixel, 0 to 1; rows are `step` CSS pixels apart.
 * The count is taken over a short stretch on both sides, or else rows with two and rows with three marks would flicker.
 */
export function densityRows(view: Viewport, position: ArrayLike<number>, full: number, step: number): Float64Array {
  const reach = 4
  const rows = new Float64Array(Math.max(0, Math.ceil(view.height / step)))
  for (let row = 0; row < rows.length; row++) {
    const y = (row + 0.5) * step
    const from = lowerBound(position, (y - reach) / view.scale + view.top)
    const to = lowerBound(position, (y + reach) / view.scale + view.top, from)
    rows[row] = full > 0 ? Math.min(1, (to - from) / (2 * reach) / full) : 0
  }
  return rows
}

/** Index of the mark at an axis position, as far as the screen can tell; -1 where there is none. */
export function markAt(view: Viewport, position: ArrayLike<number>, axis: number): number {
  const index = nearest(position, axis)
  return index >= 0 && Math.abs(position[index] - axis) * view.scale < 0.5 ? index : -1
}
