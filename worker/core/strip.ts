import type { Point } from '../units.ts'
import type { Samples } from '../work.ts'
import type { Band } from './bands.ts'
import type { IntensityReader } from './intensity.ts'
import { pathLength, pointAt, segmentDirections, tangentAt } from './path.ts'
import { fillPlane, type IntensityPlane } from './plane.ts'
import type { Transect } from './transect.ts'

/** A transect as a ribbon of rows: row i lies at path distance i + 0.5, its samples side by side from left to right. */
export interface Ribbon {
  rows: number
  /** Distance of each sample of a row from the path, scan pixels, growing to the right: [samples across]. */
  offsets: Float64Array
  /** The rows of a band, read from the samples of its region, with `margin` rows beyond both its ends. */
  stripOf(band: Band, samples: Samples, reader: IntensityReader, margin: number): Strip
}

/** The rows of one band. */
export interface Strip {
  /**
   * The samples of a row sheared along beds that fall by `slope` pixels for each pixel to the right, [samples across];
   * NaN where there is no usable pixel. They are put into `values`, or lie in the strip itself: read, never written.
   */
  sample(row: number, slope: number, values: Float32Array): Float32Array
}

/** Straight transects along the scan's own rows or columns give its pixels as they are; all others are interpolated. */
export function ribbonOf(transect: Transect): Ribbon {
  const first = segmentDirections(transect.points, 1).along
  const straight = transect.points.every((_, i) => {
    if (i === 0) return true
    const { along } = segmentDirections(transect.points, i)
    return along.x === first.x && along.y === first.y
  })
  return straight && (first.x === 0 || first.y === 0) ? straightRibbon(transect) : obliqueRibbon(transect)
}

/** Whole rows on a path; a rest shorter than a pixel at its old end is left out. */
function rowsOf(points: readonly Point[]): number {
  return Math.max(1, Math.floor(pathLength(points) + 1e-6))
}

function straightRibbon(transect: Transect): Ribbon {
  const { points, width, masks } = transect
  const { along, across } = segmentDirections(points, 1)
  const alongX = along.x !== 0
  const start = alongX ? points[0].x : points[0].y
  const middle = alongX ? points[0].y : points[0].x
  const downcore = alongX ? along.x : along.y
  const rightwards = alongX ? across.y : across.x
  // Pixels of a row whose centres lie within the width; at least the one under the path.
  let low = Math.ceil(middle - width / 2 - 0.5 - 1e-6)
  let high = Math.floor(middle + width / 2 - 0.5 + 1e-6)
  if (low > high) low = high = Math.floor(middle)
  const count = high - low + 1
  const offsets = Float64Array.from({ length: count }, (_, k) =>
    rightwards > 0 ? low + k + 0.5 - middle : middle - (high - k + 0.5),
  )
  // Row i is centred on pixel `base + downcore * i`, `phase` pixels further down where the path starts inside a pixel.
  const centre = downcore > 0 ? start : start - 1
  const base = downcore > 0 ? Math.floor(centre) : Math.ceil(centre)
  const phase = Math.abs(centre - base)

  function stripOf(band: Band, samples: Samples, reader: IntensityReader, margin: number): Strip {
    const firstRow = band.from - margin
    const rows = band.to - band.from + 2 * margin + 1
    const nearest = downcore > 0 ? base + firstRow : base - firstRow - rows + 1
    const rowStride = downcore * count
    const origin = (downcore > 0 ? 0 : (rows - 1) * count) + (rightwards > 0 ? 0 : count - 1)
    const plane: IntensityPlane = {
      region: alongX
        ? { x: nearest, y: low, width: rows, height: count }
        : { x: low, y: nearest, width: count, height: rows },
      data: new Float32Array(rows * count),
      origin,
      rowStride: alongX ? rightwards : rowStride,
      columnStride: alongX ? rowStride : rightwards,
    }
    fillPlane(plane, samples, band.region, reader, masks)
    const { data } = plane
    return {
      sample(row, slope, values) {
        const at = row - firstRow
        if (slope === 0 && phase === 0) {
          return data.subarray(at * count, (at + 1) * count)
        }
        for (let k = 0; k < count; k++) {
          const place = at + phase + offsets[k] * slope
          const whole = Math.floor(place)
          const share = place - whole
          const from = whole * count + k
          const value = data[from]
          values[k] = share === 0 ? value : value + share * (data[from + count] - value)
        }
        return values
      },
    }
  }
  return { rows: rowsOf(points), offsets, stripOf }
}

function obliqueRibbon(transect: Transect): Ribbon {
  const { points, masks } = transect
  const rows = rowsOf(points)
  const count = Math.max(1, Math.round(transect.width))
  const offsets = Float64Array.from({ length: count }, (_, k) => ((k + 0.5 - count / 2) * transect.width) / count)
  const length = pathLength(points)

  function stripOf(band: Band, samples: Samples, reader: IntensityReader): Strip {
    const { region } = band
    const plane: IntensityPlane = {
      region,
      data: new Float32Array(region.width * region.height),
      origin: 0,
      rowStride: region.width,
      columnStride: 1,
    }
    fillPlane(plane, samples, region, reader, masks)
    return {
      sample(row, slope, values) {
        const distance = row + 0.5
        const { along, across } = tangentAt(points, distance)
        const centre = pointAt(points, distance)
        // Rows beyond an end run on in its direction.
        const beyond = distance < 0 ? distance : Math.max(0, distance - length)
        for (let k = 0; k < count; k++) {
          const down = beyond + offsets[k] * slope
          const x = centre.x + offsets[k] * across.x + down * along.x
          const y = centre.y + offsets[k] * across.y + down * along.y
          values[k] = bilinear(plane, x, y)
        }
        return values
      },
    }
  }
  return { rows, offsets, stripOf }
}

/** Intensity at a point of the scan from the four pixels around it; NaN where one of them is missing or masked. */
function bilinear({ region, data }: IntensityPlane, x: number, y: number): number {
  const px = x - region.x - 0.5
  const py = y - region.y - 0.5
  // Half a pixel from the border of the scan the outermost pixel stands for itself.
  const column = Math.min(Math.max(0, Math.floor(px)), Math.max(0, region.width - 2))
  const row = Math.min(Math.max(0, Math.floor(py)), Math.max(0, region.height - 2))
  if (!(px >= -0.5 && py >= -0.5 && px <= region.width - 0.5 && py <= region.height - 0.5)) return NaN
  const right = Math.min(1, Math.max(0, px - column))
  const down = Math.min(1, Math.max(0, py - row))
  const toRight = region.width > 1 ? 1 : 0
  const toBelow = region.height > 1 ? region.width : 0
  const at = row * region.width + column
  const above = mix(data[at], data[at + toRight], right)
  const below = mix(data[at + toBelow], data[at + toBelow + toRight], right)
  return mix(above, below, down)
}

/** Between two values; a share of 0 or 1 takes the one alone, so that a gap beside it does not matter. */
function mix(from: number, to: number, share: number): number {
  if (share === 0) return from
  if (share === 1) return to
  return from + share * (to - from)
}
