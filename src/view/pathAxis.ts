/**
 * Path pixels to axis pixels and back: a transect may bend, so a distance along it is not a distance down the core.
 * Knots at the transect's points, straight lines between; both columns increase. [points]
 */
export interface PathAxis {
  readonly path: Float64Array
  readonly axis: Float64Array
}

/** The knots of a transect given in upright coordinates. A point that lies no farther downcore than the one before it is skipped. */
export function pathAxis(points: readonly { axis: number; across: number }[]): PathAxis {
  const path: number[] = []
  const axis: number[] = []
  let walked = 0
  for (let i = 0; i < points.length; i++) {
    if (i > 0) walked += Math.hypot(points[i].axis - points[i - 1].axis, points[i].across - points[i - 1].across)
    if (path.length > 0 && !(points[i].axis > axis[axis.length - 1])) continue
    path.push(walked)
    axis.push(points[i].axis)
  }
  return { path: Float64Array.from(path), axis: Float64Array.from(axis) }
}

export function pathToAxis(knots: PathAxis, path: number): number {
  return interpolate(knots.path, knots.axis, path)
}

export function axisToPath(knots: PathAxis, axis: number): number {
  return interpolate(knots.axis, knots.path, axis)
}

/** A whole sorted column of path positions as axis positions; session keeps the result until the count changes. */
export function columnToAxis(knots: PathAxis, path: ArrayLike<number>): Float64Array {
  const result = new Float64Array(path.length)
  for (let i = 0; i < path.length; i++) result[i] = pathToAxis(knots, path[i])
  return result
}

/** Straight lines between the knots, carried on beyond the first and the last. */
function interpolate(from: Float64Array, to: Float64Array, value: number): number {
  const last = from.length - 1
  if (last < 1) return to.length === 0 ? value : to[0] + value - from[0]
  let k = 0
  while (k < last - 1 && value > from[k + 1]) k++
  return to[k] + ((value - from[k]) * (to[k + 1] - to[k])) / (from[k + 1] - from[k])
}
