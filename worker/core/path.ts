import { pathPixels, scanPixels, type PathPixels, type Point, type ScanPixels } from '../units.ts'

/** Unit vectors at a place on a path: `along` points downcore, `across` to the right of it, the core standing upright. */
export interface Directions {
  along: { x: number; y: number }
  across: { x: number; y: number }
}

/** Length of a path, scan pixels. */
export function pathLength(points: readonly Point[]): PathPixels {
  let length = 0
  for (let i = 1; i < points.length; i++) length += segmentLength(points, i)
  return pathPixels(length)
}

/** The place on a path at a distance from its first point; beyond an end it stays at that end. */
export function pointAt(points: readonly Point[], distance: number): Point {
  const { segment, rest } = locate(points, distance)
  const share = Math.min(1, Math.max(0, rest / segmentLength(points, segment)))
  const from = points[segment - 1]
  const to = points[segment]
  return { x: scanPixels(from.x + share * (to.x - from.x)), y: scanPixels(from.y + share * (to.y - from.y)) }
}

/** The directions along and across a path at a distance from its first point; at a corner those of the older segment. */
export function tangentAt(points: readonly Point[], distance: number): Directions {
  const { segment } = locate(points, distance)
  return segmentDirections(points, segment)
}

/** Where a path comes nearest to a point of the scan: the distance along it, and how far the point lies to the right of it. */
export function lengthAlong(points: readonly Point[], point: Point): { distance: PathPixels; across: ScanPixels } {
  let walked = 0
  let nearest = Infinity
  let distance = 0
  let across = 0
  for (let i = 1; i < points.length; i++) {
    const length = segmentLength(points, i)
    const directions = segmentDirections(points, i)
    const dx = point.x - points[i - 1].x
    const dy = point.y - points[i - 1].y
    const along = Math.min(length, Math.max(0, dx * directions.along.x + dy * directions.along.y))
    const away = Math.hypot(dx - along * directions.along.x, dy - along * directions.along.y)
    if (away < nearest) {
      nearest = away
      distance = walked + along
      across = dx * directions.across.x + dy * directions.across.y
    }
    walked += length
  }
  return { distance: pathPixels(distance), across: scanPixels(across) }
}

/** Length of segment i, from point i - 1 to point i. */
export function segmentLength(points: readonly Point[], i: number): number {
  return Math.hypot(points[i].x - points[i - 1].x, points[i].y - points[i - 1].y)
}

/** Directions of segment i, from point i - 1 to point i; downwards on the scan, `across` points to the right. */
export function segmentDirections(points: readonly Point[], i: number): Directions {
  const length = segmentLength(points, i)
  const along = { x: (points[i].x - points[i - 1].x) / length, y: (points[i].y - points[i - 1].y) / length }
  return { along, across: { x: along.y, y: -along.x } }
}

/** The segment (from 1) that holds a distance, and the rest of the distance within it. */
function locate(points: readonly Point[], distance: number): { segment: number; rest: number } {
  let rest = distance
  for (let i = 1; i < points.length - 1; i++) {
    const length = segmentLength(points, i)
    if (rest < length) return { segment: i, rest }
    rest -= length
  }
  return { segment: points.length - 1, rest }
}
