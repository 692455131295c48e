import { nearest } from './sorted.ts'
import type { Across, StripSpan, TransectHandle, UprightTransect } from './strip/data.ts'
import { acrossToScreen } from './tiles.ts'
import { bandEdges } from './transectShape.ts'
import { toAxis, toScreen } from './viewport.ts'
import type { Viewport } from './viewport.ts'

/** Index of the boundary nearest to a height, CSS pixels below the top of the view; -1 where none lies within the tolerance. */
export function hitBoundary(view: Viewport, position: ArrayLike<number>, y: number, tolerance = 6): number {
  const index = nearest(position, toAxis(view, y))
  return index >= 0 && Math.abs(toScreen(view, position[index]) - y) <= tolerance ? index : -1
}

export interface SpanHit {
  index: number
  part: 'from' | 'to' | 'body'
}

/** The span at a height and where it was grasped; ends go before bodies, and of bodies that overlap the shorter one. */
export function hitSpan(view: Viewport, spans: readonly StripSpan[], y: number, tolerance = 5): SpanHit | null {
  const ends = spans.flatMap(({ from, to }) => [Math.abs(toScreen(view, from) - y), Math.abs(toScreen(view, to) - y)])
  const end = closest(ends, tolerance)
  if (end >= 0) return { index: end >> 1, part: end % 2 === 0 ? 'from' : 'to' }
  const axis = toAxis(view, y)
  const lengths = spans.map(({ from, to }) => (axis >= from && axis <= to ? to - from : Infinity))
  const body = closest(lengths, Number.MAX_VALUE)
  return body >= 0 ? { index: body, part: 'body' } : null
}

/** The handle of a transect under a point of its column (CSS pixels from the column's left and the view's top). Points go before edges, edges before the path. */
export function hitTransectHandle(
  view: Viewport,
  across: Across,
  width: number,
  transect: UprightTransect,
  x: number,
  y: number,
  tolerance = 8,
): TransectHandle | null {
  const place = (point: { axis: number; across: number }): [number, number] => [
    acrossToScreen(across, width, point.across),
    toScreen(view, point.axis),
  ]
  const path = transect.points.map(place)
  const point = closest(
    path.map(([px, py]) => Math.hypot(px - x, py - y)),
    tolerance,
  )
  if (point >= 0) return { kind: 'point', index: point }
  const edges = bandEdges(transect)
  const sides = (['left', 'right'] as const).map((side) => ({ side, far: distances(edges[side].map(place), x, y) }))
  const reach = sides.map(({ far }) => Math.min(Infinity, ...far))
  const near = sides[reach[0] <= reach[1] ? 0 : 1]
  const edge = closest(near.far, tolerance * 0.75)
  if (edge >= 0) return { kind: 'edge', side: near.side, index: edge }
  const segment = closest(distances(path, x, y), tolerance * 0.75)
  return segment >= 0 ? { kind: 'segment', index: segment } : null
}

/** Index of the least of some distances, -1 where none is within the tolerance. */
function closest(far: readonly number[], tolerance: number): number {
  let best = -1
  far.forEach((distance, index) => {
    if (distance <= tolerance && (best < 0 || distance < far[best])) best = index
  })
  return best
}

/** Distance of a point from each part of a line. */
function distances(line: readonly [number, number][], x: number, y: number): number[] {
  const result: number[] = []
  for (let i = 0; i + 1 < line.length; i++) {
    const [[x1, y1], [x2, y2]] = [line[i], line[i + 1]]
    const square = (x2 - x1) ** 2 + (y2 - y1) ** 2
    const share = square > 0 ? Math.min(1, Math.max(0, ((x - x1) * (x2 - x1) + (y - y1) * (y2 - y1)) / square)) : 0
    result.push(Math.hypot(x1 + share * (x2 - x1) - x, y1 + share * (y2 - y1) - y))
  }
  return result
}
