import type { Orientation, ScanShape } from '../../worker/core/scan.ts'
import type { Transect } from '../../worker/core/transect.ts'
import { scanPixels } from '../../worker/units.ts'
import type { Point } from '../../worker/units.ts'
import type { UprightTransect } from './strip/data.ts'

/*
 * The scan's own pixels to the upright core and back: `axis` runs downcore from the young end, `across` to the right when
 * the core stands upright, young side up. Quarter turns only, never a mirror image. Same turns as `uprightView` of the core.
 */

export interface UprightPoint {
  axis: number
  across: number
}

type Size = Pick<ScanShape, 'width' | 'height'>

export function toUpright(point: { x: number; y: number }, size: Size, orientation: Orientation): UprightPoint {
  const low = orientation.young === 'low'
  if (orientation.axis === 'y') {
    return low ? { axis: point.y, across: point.x } : { axis: size.height - point.y, across: size.width - point.x }
  }
  return low ? { axis: point.x, across: size.height - point.y } : { axis: size.width - point.x, across: point.y }
}

export function toScan(point: UprightPoint, size: Size, orientation: Orientation): Point {
  const low = orientation.young === 'low'
  if (orientation.axis === 'y') {
    return low
      ? { x: scanPixels(point.across), y: scanPixels(point.axis) }
      : { x: scanPixels(size.width - point.across), y: scanPixels(size.height - point.axis) }
  }
  return low
    ? { x: scanPixels(point.axis), y: scanPixels(size.height - point.across) }
    : { x: scanPixels(size.width - point.axis), y: scanPixels(point.across) }
}

/** Length along the core and breadth across it, scan pixels. */
export function uprightSize(size: Size, orientation: Orientation): { length: number; breadth: number } {
  return orientation.axis === 'y'
    ? { length: size.height, breadth: size.width }
    : { length: size.width, breadth: size.height }
}

export function uprightTransect(transect: Transect, size: Size, orientation: Orientation): UprightTransect {
  return { points: transect.points.map((point) => toUpright(point, size, orientation)), width: transect.width }
}
