import { Fault } from '../check.ts'
import type { Point, Region } from '../units.ts'
import type { Samples } from '../work.ts'
import type { IntensityReader } from './intensity.ts'

/**
 * The intensities of a rectangle of the scan, which may reach beyond it; NaN where there is no pixel or where it is masked.
 * Pixel (x, y) of the scan is element `origin + (y - region.y) * rowStride + (x - region.x) * columnStride`.
 */
export interface IntensityPlane {
  region: Region
  data: Float32Array
  origin: number
  rowStride: number
  columnStride: number
}

/** Fills a plane from samples of the scan that cover the part `read` of it, and leaves out what the masks cover. */
export function fillPlane(
  plane: IntensityPlane,
  samples: Samples,
  read: Region,
  reader: IntensityReader,
  masks: readonly Point[][],
): void {
  if (samples.shape[0] !== read.height || samples.shape[1] !== read.width) {
    const got = `${samples.shape[1]} x ${samples.shape[0]}`
    throw new Fault(
      'internal',
      'samples',
      got,
      `samples of ${read.width} x ${read.height} pixels were asked for; ${got} came`,
    )
  }
  const { region } = plane
  const left = Math.max(region.x, read.x)
  const top = Math.max(region.y, read.y)
  const width = Math.min(region.x + region.width, read.x + read.width) - left
  const height = Math.min(region.y + region.height, read.y + read.height) - top
  if (width !== region.width || height !== region.height) plane.data.fill(NaN)
  if (width > 0 && height > 0) {
    const part = samples.lo(top - read.y, left - read.x, 0).hi(height, width, samples.shape[2])
    reader(part, { ...plane, offset: elementAt(plane, left, top) })
  }
  for (const mask of masks) leaveOut(plane, mask)
}

function elementAt(plane: IntensityPlane, x: number, y: number): number {
  return plane.origin + (y - plane.region.y) * plane.rowStride + (x - plane.region.x) * plane.columnStride
}

/** Sets every pixel whose centre lies inside a closed polygon (even-odd rule) to NaN. */
function leaveOut(plane: IntensityPlane, polygon: readonly Point[]): void {
  const { region } = plane
  const crossings: number[] = []
  const heights = polygon.map((corner) => corner.y)
  const first = Math.max(region.y, Math.floor(Math.min(...heights)))
  const last = Math.min(region.y + region.height - 1, Math.ceil(Math.max(...heights)))
  for (let y = first; y <= last; y++) {
    const level = y + 0.5
    crossings.length = 0
    for (let i = 0; i < polygon.length; i++) {
      const a = polygon[i]
      const b = polygon[(i + 1) % polygon.length]
      if (a.y <= level !== b.y <= level) crossings.push(a.x + ((level - a.y) / (b.y - a.y)) * (b.x - a.x))
    }
    crossings.sort((a, b) => a - b)
    for (let i = 0; i + 1 < crossings.length; i += 2) {
      // A pixel is left out when its centre, at x + 0.5, lies between the two crossings.
      const from = Math.max(region.x, Math.ceil(crossings[i] - 0.5))
      const to = Math.min(region.x + region.width - 1, Math.ceil(crossings[i + 1] - 0.5) - 1)
      for (let x = from; x <= to; x++) plane.data[elementAt(plane, x, y)] = NaN
    }
  }
}
