import type { Region } from '../units.ts'
import { segmentDirections, segmentLength } from './path.ts'
import type { ScanShape } from './scan.ts'
import type { Transect } from './transect.ts'

/** A stretch of a path's rows, [from, to), and the part of the scan that holds them. */
export interface Band {
  from: number
  to: number
  region: Region
}

export interface BandRules {
  /** Rows beyond both ends of each band. */
  margin: number
  /** Pixels beyond both sides of the width. */
  side: number
  /** Bands begin and end at these rows, the number of rows last; sorted. */
  cuts: ArrayLike<number>
  /** About this many pixels a band at most, where the cuts allow it. */
  pixels?: number
}

/** Pixels of a band: 4 megapixels are read and worked on in a fraction of a second. */
const pixelsPerBand = 4 << 20

/** The rectangles of the scan that a profile along a transect is read from, from young to old. */
export function regionsOf(shape: ScanShape, transect: Transect, rules: BandRules): Band[] {
  const { cuts } = rules
  const bands: Band[] = []
  let first = 0
  while (first < cuts.length - 1) {
    let last = first + 1
    let region = regionOfRows(shape, transect, cuts[first], cuts[last], rules)
    while (last < cuts.length - 1) {
      const wider = regionOfRows(shape, transect, cuts[first], cuts[last + 1], rules)
      if (wider.width * wider.height > (rules.pixels ?? pixelsPerBand)) break
      region = wider
      last++
    }
    bands.push({ from: cuts[first], to: cuts[last], region })
    first = last
  }
  return bands
}

/** The smallest rectangle of whole pixels, inside the scan, that holds the path between two distances in its full width. */
function regionOfRows(shape: ScanShape, transect: Transect, from: number, to: number, rules: BandRules): Region {
  const { points } = transect
  const half = transect.width / 2 + rules.side
  let left = Infinity
  let right = -Infinity
  let top = Infinity
  let bottom = -Infinity
  const include = (x: number, y: number) => {
    left = Math.min(left, x)
    right = Math.max(right, x)
    top = Math.min(top, y)
    bottom = Math.max(bottom, y)
  }
  let walked = 0
  for (let i = 1; i < points.length; i++) {
    const end = walked + segmentLength(points, i)
    const { along, across } = segmentDirections(points, i)
    const start = Math.max(from, walked)
    const stop = Math.min(to, end)
    if (start <= stop) {
      // Rows sheared along the bedding run on in their own direction, beyond corners and ends too.
      for (const distance of [start - rules.margin, stop + rules.margin]) {
        const x = points[i - 1].x + (distance - walked) * along.x
        const y = points[i - 1].y + (distance - walked) * along.y
        include(x - half * across.x, y - half * across.y)
        include(x + half * across.x, y + half * across.y)
      }
    }
    walked = end
  }
  const x = Math.min(shape.width - 1, Math.max(0, Math.floor(left + 1e-6)))
  const y = Math.min(shape.height - 1, Math.max(0, Math.floor(top + 1e-6)))
  return {
    x,
    y,
    width: Math.max(1, Math.min(shape.width, Math.ceil(right - 1e-6)) - x),
    height: Math.max(1, Math.min(shape.height, Math.ceil(bottom - 1e-6)) - y),
  }
}
