import type { Point } from '../../../worker/units.ts'
import { scanPixels } from '../../../worker/units.ts'

/** A further point in the middle of the longest part of the path, to bend it there. */
export function addPoint(points: readonly Point[]): Point[] {
  let longest = 0
  const length = (i: number) => Math.hypot(points[i + 1].x - points[i].x, points[i + 1].y - points[i].y)
  for (let i = 1; i + 1 < points.length; i++) if (length(i) > length(longest)) longest = i
  const [a, b] = [points[longest], points[longest + 1]]
  const middle = { x: scanPixels((a.x + b.x) / 2), y: scanPixels((a.y + b.y) / 2) }
  return points.toSpliced(longest + 1, 0, middle)
}

/** The path without the inner point that bends it least; null when there is none. */
export function removePoint(points: readonly Point[]): Point[] | null {
  let least = -1
  let bend = Infinity
  for (let i = 1; i + 1 < points.length; i++) {
    const [a, b, c] = [points[i - 1], points[i], points[i + 1]]
    const detour =
      Math.hypot(b.x - a.x, b.y - a.y) + Math.hypot(c.x - b.x, c.y - b.y) - Math.hypot(c.x - a.x, c.y - a.y)
    if (detour < bend) {
      bend = detour
      least = i
    }
  }
  return least < 0 ? null : points.toSpliced(least, 1)
}
