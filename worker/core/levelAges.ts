import { hpdLevels, hpdRanges, yearFigures } from './hpd.ts'
import type { HpdRange } from './hpd.ts'

/** Ranges of calendar years for each level: those of level i are start[i] to start[i + 1] - 1; older ranges first. */
export interface YearRanges {
  /** [levels + 1] */
  start: Int32Array
  /** Oldest and youngest astronomical year of a range, both included, and the probability it holds, [ranges]. */
  from: Int32Array
  to: Int32Array
  probability: Float64Array
}

/** Ages of levels as astronomical calendar years; columns [levels]. */
export interface LevelAges {
  mean: Float64Array
  sd: Float64Array
  median: Int32Array
  hpd68: YearRanges
  hpd95: YearRanges
  /**
   * The posterior itself, for drawing: of level i, probability[start[i] + k] belongs to the year youngest[i] - k; ends that
   * hold less than 1e-6 are left out. 4 bytes a year and level.
   */
  density: { youngest: Int32Array; start: Int32Array; probability: Float32Array }
}

/** Ends of a drawn posterior that hold less than this are not drawn. */
const notDrawn = 1e-6

/** Gathers levels in any order; the ages are laid out at the end. */
export class AgeColumns {
  private readonly mean: Float64Array
  private readonly sd: Float64Array
  private readonly median: Int32Array
  private readonly youngest: Int32Array
  private readonly ranges68: HpdRange[][] = []
  private readonly ranges95: HpdRange[][] = []
  private readonly drawn: Float32Array[] = []

  constructor(levels: number) {
    this.mean = new Float64Array(levels)
    this.sd = new Float64Array(levels)
    this.median = new Int32Array(levels)
    this.youngest = new Int32Array(levels)
  }

  /** Takes the posterior of a level over x = -year = low ...; it must sum to 1. */
  add(level: number, low: number, probability: Float64Array): void {
    const { mean, sd, median } = yearFigures(probability, low)
    this.mean[level] = -mean
    this.sd[level] = sd
    this.median[level] = -median
    let first = 0
    let end = probability.length
    for (let cut = probability[0]; cut < notDrawn && first < end - 1; cut += probability[first]) first++
    for (let cut = probability[end - 1]; cut < notDrawn && end > first + 1; cut += probability[end - 1]) end--
    const drawn = probability.subarray(first, end)
    this.ranges68[level] = hpdRanges(drawn, low + first, hpdLevels[0])
    this.ranges95[level] = hpdRanges(drawn, low + first, hpdLevels[1])
    this.youngest[level] = -(low + first)
    this.drawn[level] = new Float32Array(drawn)
  }

  /** The ages of chosen levels, in their order. */
  of(levels: ArrayLike<number>): LevelAges {
    const order = Array.from(levels)
    const pieces = order.map((level) => this.drawn[level])
    return {
      mean: Float64Array.from(order, (level) => this.mean[level]),
      sd: Float64Array.from(order, (level) => this.sd[level]),
      median: Int32Array.from(order, (level) => this.median[level]),
      hpd68: yearRanges(order.map((level) => this.ranges68[level])),
      hpd95: yearRanges(order.map((level) => this.ranges95[level])),
      density: {
        youngest: Int32Array.from(order, (level) => this.youngest[level]),
        start: startsOf(pieces),
        probability: joined(pieces),
      },
    }
  }
}

function startsOf(pieces: readonly ArrayLike<unknown>[]): Int32Array {
  const start = new Int32Array(pieces.length + 1)
  for (const [i, piece] of pieces.entries()) start[i + 1] = start[i] + piece.length
  return start
}

function joined(pieces: readonly Float32Array[]): Float32Array {
  const start = startsOf(pieces)
  const all = new Float32Array(start[pieces.length])
  for (const [i, piece] of pieces.entries()) all.set(piece, start[i])
  return all
}

/** Ranges of x, ascending, as ranges of years, the older first. */
function yearRanges(levels: readonly HpdRange[][]): YearRanges {
  const flat = levels.flatMap((ranges) => ranges.toReversed())
  return {
    start: startsOf(levels),
    from: Int32Array.from(flat, ({ to }) => -to),
    to: Int32Array.from(flat, ({ from }) => -from),
    probability: Float64Array.from(flat, ({ probability }) => probability),
  }
}

/** The ranges of one level. */
export function rangesAt(ranges: YearRanges, level: number): HpdRange[] {
  const found: HpdRange[] = []
  for (let r = ranges.start[level]; r < ranges.start[level + 1]; r++) {
    found.push({ from: ranges.from[r], to: ranges.to[r], probability: ranges.probability[r] })
  }
  return found
}
