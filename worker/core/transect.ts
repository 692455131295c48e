import { checkFinite, checkInteger, Fault } from '../check.ts'
import { pathPixels, scanPixels, type PathPixels, type Point, type ScanPixels } from '../units.ts'
import { pathLength, pointAt, segmentDirections, segmentLength } from './path.ts'
import type { Orientation, ScanShape } from './scan.ts'

export { lengthAlong, pathLength, pointAt, tangentAt, type Directions } from './path.ts'

/** A path on the scan from young to old, with the width over which the profile is averaged. Stored in scan pixels. */
export interface Transect {
  points: Point[]
  width: ScanPixels
  /**
   * Bedding tilt in radians against the perpendicular of the path; null: estimated from the image.
   * Positive where a layer lies further down the path on the right of it, the core standing upright, young side up.
   */
  tilt: number | null
  /** Closed polygons whose inside is left out: cracks, dropstones, labels, gas holes. */
  masks: Point[][]
}

/** Steepest bedding against the perpendicular of the path, radians; the path itself should follow steeper beds. */
export const steepestTilt = (15 * Math.PI) / 180

/** The default width reaches over the middle two thirds of a core at most: its edges are dragged when the core is taken. */
const widthShare = 2 / 3
/** Wider than this the median gains nothing, and curved bedding begins to blur it. */
const widestDefault = 200

/** Down the middle of the core's axis from the young end to the old, clear of the dragged edges. */
export function defaultTransect(shape: ScanShape, orientation: Orientation): Transect {
  checkShape(shape)
  const alongX = orientation.axis === 'x'
  const length = alongX ? shape.width : shape.height
  const breadth = alongX ? shape.height : shape.width
  let width = Math.max(1, Math.min(widestDefault, Math.floor(breadth * widthShare)))
  // Even in an even breadth, odd in an odd one: the strip then begins and ends between pixels.
  if (width > 1 && (breadth - width) % 2 !== 0) width--
  const at = (distance: number): Point => ({
    x: scanPixels(alongX ? distance : breadth / 2),
    y: scanPixels(alongX ? breadth / 2 : distance),
  })
  const ends = [at(0), at(length)]
  return {
    points: orientation.young === 'low' ? ends : ends.reverse(),
    width: scanPixels(width),
    tilt: null,
    masks: [],
  }
}

/** Downcore coordinate, scan pixels from the young end of the scan along the core's axis, of a distance along the path. */
export function axisPosition(
  transect: Transect,
  orientation: Orientation,
  shape: ScanShape,
  distance: number,
): ScanPixels {
  return scanPixels(downcore(pointAt(transect.points, distance), orientation, shape))
}

/**
 * The inverse of `axisPosition`: distance along the path at which it first reaches a downcore coordinate.
 * Younger than the path's first point gives 0, older than everything on it the path's length.
 */
export function distanceAtAxis(
  transect: Transect,
  orientation: Orientation,
  shape: ScanShape,
  axis: number,
): PathPixels {
  const { points } = transect
  let walked = 0
  let before = downcore(points[0], orientation, shape)
  if (axis <= before) return pathPixels(0)
  for (let i = 1; i < points.length; i++) {
    const after = downcore(points[i], orientation, shape)
    const length = segmentLength(points, i)
    if (axis <= after) return pathPixels(walked + (length * (axis - before)) / (after - before))
    walked += length
    before = after
  }
  return pathPixels(walked)
}

/** Rejects, with a Fault that says what and where, a transect that no profile can be read along. */
export function checkTransect(shape: ScanShape, transect: Transect): void {
  checkShape(shape)
  checkPoints(shape, transect.points)
  checkWidth(shape, transect)
  const { tilt, masks } = transect
  if (tilt !== null && !(Math.abs(checkFinite('transect.tilt', tilt)) <= steepestTilt + 1e-9)) {
    throw new Fault(
      'argument',
      'transect.tilt',
      tilt,
      `transect.tilt must be between -15 and 15 degrees; it is ${degrees(tilt)}: lay the path across the bedding instead`,
    )
  }
  masks.forEach((mask, i) => {
    const field = `transect.masks[${i}]`
    if (mask.length < 3)
      throw new Fault('argument', field, mask.length, `${field} must have at least 3 corners; it has ${mask.length}`)
    mask.forEach((corner, k) => {
      checkFinite(`${field}[${k}].x`, corner.x)
      checkFinite(`${field}[${k}].y`, corner.y)
    })
  })
}

const mostPoints = 1000

function checkPoints(shape: ScanShape, points: readonly Point[]): void {
  if (points.length < 2 || points.length > mostPoints) {
    const rule = points.length < 2 ? 'at least 2 points' : `at most ${mostPoints} points`
    throw new Fault(
      'argument',
      'transect.points',
      points.length,
      `transect.points must have ${rule}; there are ${points.length}: draw the path from the young end to the old`,
    )
  }
  points.forEach(({ x, y }, i) => {
    const field = `transect.points[${i}]`
    checkFinite(`${field}.x`, x)
    checkFinite(`${field}.y`, y)
    if (!(x >= 0 && x <= shape.width && y >= 0 && y <= shape.height)) {
      throw new Fault(
        'argument',
        field,
        `${x},${y}`,
        `${field} must lie on the scan of ${shape.width} x ${shape.height} pixels; it is at ${x}, ${y}`,
      )
    }
  })
  const length = pathLength(points)
  if (!(length >= 1)) {
    throw new Fault(
      'argument',
      'transect.points',
      length,
      `transect.points must span at least one pixel; the path is ${length} pixels long`,
    )
  }
  for (let i = 1; i < points.length; i++) checkSegment(points, i)
}

/** A segment has a length, does not turn back on the one before it, and crosses no earlier one. */
function checkSegment(points: readonly Point[], i: number): void {
  const field = `transect.points[${i}]`
  const place = `${points[i].x}, ${points[i].y}`
  if (!(segmentLength(points, i) > 0)) {
    throw new Fault('argument', field, place, `${field} must differ from the point before it; both are at ${place}`)
  }
  if (i > 1) {
    const before = segmentDirections(points, i - 1).along
    const after = segmentDirections(points, i).along
    if (!(before.x * after.x + before.y * after.y > 1e-9)) {
      throw new Fault(
        'argument',
        `transect.points[${i - 1}]`,
        place,
        `the path must not turn back on itself; at transect.points[${i - 1}] it turns by 90 degrees or more`,
      )
    }
  }
  for (let k = 1; k < i - 1; k++) {
    if (crosses(points[k - 1], points[k], points[i - 1], points[i])) {
      throw new Fault('argument', field, place, `the path must not cross itself; segment ${i} crosses segment ${k}`)
    }
  }
}

function crosses(a: Point, b: Point, c: Point, d: Point): boolean {
  const side = (p: Point, q: Point, r: Point) => Math.sign((q.x - p.x) * (r.y - p.y) - (q.y - p.y) * (r.x - p.x))
  return side(a, b, c) !== side(a, b, d) && side(c, d, a) !== side(c, d, b)
}

function checkWidth(shape: ScanShape, { points, width }: Transect): void {
  checkFinite('transect.width', width)
  let breadth = 0
  for (let i = 1; i < points.length; i++) {
    const { across } = segmentDirections(points, i)
    breadth = Math.max(breadth, Math.abs(across.x) * shape.width + Math.abs(across.y) * shape.height)
  }
  if (!(width >= 1 && width <= breadth + 1e-6)) {
    throw new Fault(
      'argument',
      'transect.width',
      width,
      `transect.width must be between 1 pixel and the breadth of the scan (${Math.floor(breadth)}); it is ${width}`,
    )
  }
}

function checkShape(shape: ScanShape): void {
  checkInteger('scan width', shape.width, 1)
  checkInteger('scan height', shape.height, 1)
}

function downcore(point: Point, orientation: Orientation, shape: ScanShape): number {
  const along = orientation.axis === 'x' ? point.x : point.y
  const length = orientation.axis === 'x' ? shape.width : shape.height
  return orientation.young === 'low' ? along : length - along
}

function degrees(radians: number): string {
  return ((radians * 180) / Math.PI).toFixed(2)
}
