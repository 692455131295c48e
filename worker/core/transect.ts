import type { Point, ScanPixels } from '../units.ts'

/** A path on the scan from young to old, with the width over which the profile is averaged. Stored in scan pixels. */
export interface Transect {
  points: Point[]
  width: ScanPixels
  /** Bedding tilt in radians against the perpendicular of the path; null: estimated from the image. */
  tilt: number | null
  /** Closed polygons whose inside is left out: cracks, dropstones, labels, gas holes. */
  masks: Point[][]
}
