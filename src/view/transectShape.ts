import type { UprightTransect } from './strip/data.ts'

/** A transect's band: the points of its two edges beside each point of the path, upright, axis and across in turn. */
export interface BandEdges {
  left: { axis: number; across: number }[]
  right: { axis: number; across: number }[]
}

/** Longest spike of an edge at a sharp bend, in half widths; beyond it the corner would run off the core. */
const longestMitre = 3

/** The edges run parallel to the path at half the width; `left` is the left side as seen on the upright core. */
export function bandEdges(transect: UprightTransect): BandEdges {
  const { points, width } = transect
  const left: BandEdges['left'] = []
  const right: BandEdges['right'] = []
  for (let i = 0; i < points.length; i++) {
    const before = direction(points, i - 1)
    const after = direction(points, i)
    const a = before ?? after ?? { axis: 1, across: 0 }
    const b = after ?? a
    // Unit vector along the middle of the bend; the edge point lies square to it, farther out the sharper the bend.
    const sum = { axis: a.axis + b.axis, across: a.across + b.across }
    const length = Math.hypot(sum.axis, sum.across) || 1
    const reach = (width / 2) * Math.min(longestMitre, 2 / length)
    const along = { axis: sum.axis / length, across: sum.across / length }
    left.push({ axis: points[i].axis + along.across * reach, across: points[i].across - along.axis * reach })
    right.push({ axis: points[i].axis - along.across * reach, across: points[i].across + along.axis * reach })
  }
  return { left, right }
}

/** Unit vector from point i to the next; null where there is none. */
function direction(points: UprightTransect['points'], i: number): { axis: number; across: number } | null {
  if (i < 0 || i + 1 >= points.length) return null
  const axis = points[i + 1].axis - points[i].axis
  const across = points[i + 1].across - points[i].across
  const length = Math.hypot(axis, across)
  return length > 0 ? { axis: axis / length, across: across / length } : null
}

/** Across position of the path at an axis position; carried on straight up and down beyond its ends. */
export function pathAcrossAt(transect: UprightTransect, axis: number): number {
  const { points } = transect
  if (points.length === 0) return 0
  let k = 0
  while (k < points.length - 2 && axis > points[k + 1].axis) k++
  if (points.length === 1) return points[0].across
  const [a, b] = [points[k], points[k + 1]]
  const share = b.axis === a.axis ? 0 : Math.min(1, Math.max(0, (axis - a.axis) / (b.axis - a.axis)))
  return a.across + share * (b.across - a.across)
}
