import type { Ground } from './ladderGround.ts'

/**
 * The local median thickness down the core, and with it the thickness coordinate: u(z) = integral of dz / median(z), event
 * beds left out. Held in cells of equal length; the coordinate is linear inside a cell.
 */
export class ThicknessField {
  /** Length of a cell, path pixels. */
  readonly cell: number
  /** Log of the local median thickness in path pixels, [cells]. */
  readonly logMedian: Float64Array
  /** Share of each cell that is no event bed, [cells]. */
  private readonly share: Float64Array
  /** Thickness coordinate at the young edge of each cell, [cells + 1]. */
  private readonly edge: Float64Array
  /** Event beds cut cells at their exact ends: u is constant from `from` to `to`. */
  private readonly ground: Ground

  constructor(ground: Ground, median: (position: number) => number) {
    this.ground = ground
    let least = Infinity
    for (let k = 0; k <= 64; k++) least = Math.min(least, median(Math.min(ground.rows - 0.5, (k * ground.rows) / 64)))
    this.cell = Math.max(1, Math.min(least / 2, ground.rows))
    const cells = Math.max(1, Math.ceil(ground.rows / this.cell))
    this.logMedian = new Float64Array(cells)
    for (let c = 0; c < cells; c++) this.logMedian[c] = Math.log(median(Math.min(ground.rows, (c + 0.5) * this.cell)))
    this.share = new Float64Array(cells).fill(1)
    for (const { from, to } of ground.events) {
      for (let c = Math.floor(from / this.cell); c < cells && c * this.cell < to; c++) {
        this.share[c] -= (Math.min(to, (c + 1) * this.cell) - Math.max(from, c * this.cell)) / this.cell
      }
    }
    this.edge = new Float64Array(cells + 1)
    this.integrate()
  }
  /** Recomputes the coordinate after `logMedian` has changed. */
  integrate(): void {
    for (let c = 0; c < this.logMedian.length; c++) {
      this.edge[c + 1] = this.edge[c] + (Math.max(0, this.share[c]) * this.cell) / Math.exp(this.logMedian[c])
    }
  }

  cellOf(position: number): number {
    return Math.max(0, Math.min(this.logMedian.length - 1, Math.floor(position / this.cell)))
  }

  medianAt(position: number): number {
    return Math.exp(this.logMedian[this.cellOf(position)])
  }

  /** Thickness coordinate of a position in path pixels. */
  coordinate(position: number): number {
    const c = this.cellOf(position)
    if (this.share[c] === 1) return this.edge[c] + (position - c * this.cell) / Math.exp(this.logMedian[c])
    return this.edge[c] + this.timeInCell(c, position) / Math.exp(this.logMedian[c])
  }

  /** Pixels from the young edge of cell c to `position` that belong to no event bed. */
  private timeInCell(c: number, position: number): number {
    const from = c * this.cell
    let length = position - from
    for (const bed of this.ground.events) {
      length -= Math.max(0, Math.min(bed.to, position) - Math.max(bed.from, from))
    }
    return length
  }

  /** Position of a thickness coordinate between two positions; the inverse of `coordinate`. */
  positionOf(u: number): number {
    let low = 0
    let high = this.logMedian.length
    while (high - low > 1) {
      const middle = (low + high) >> 1
      if (this.edge[middle] <= u) low = middle
      else high = middle
    }
    const width = this.edge[low + 1] - this.edge[low]
    return this.cell * (low + (width > 0 ? Math.min(1, (u - this.edge[low]) / width) : 0))
  }
}

/** Layers over which the local median is remembered: the decay length of the smoother. */
const memory = 8

/**
 * Moves the local median to where the layers say it is: a smoother of the mean log thickness found in each cell, whose
 * memory is counted in layers so that a tenfold change of thickness is followed alike in its thick and its thin part.
 * Two-sided exponential weights are the best linear smoother of a level that walks randomly (Muth 1960).
 * `count` and `logSum` [cells]: expected number of layers centred in each cell, and the sum of their log thickness in path pixels.
 */
export function followThickness(field: ThicknessField, count: Float64Array, logSum: Float64Array): void {
  const cells = count.length
  const smoothCount = new Float64Array(cells)
  const smoothSum = new Float64Array(cells)
  const decay = field.logMedian.map((log) => Math.exp(-field.cell / Math.exp(log) / memory))
  let n = 0
  let s = 0
  for (let c = 0; c < cells; c++) {
    n = n * decay[c] + count[c]
    s = s * decay[c] + logSum[c]
    smoothCount[c] += n
    smoothSum[c] += s
  }
  n = 0
  s = 0
  for (let c = cells - 1; c >= 0; c--) {
    smoothCount[c] += n
    smoothSum[c] += s
    n = (n + count[c]) * decay[c]
    s = (s + logSum[c]) * decay[c]
  }
  // Where nothing was seen for many layers the old median stays: half a layer's worth of 'no change'.
  for (let c = 0; c < cells; c++) {
    field.logMedian[c] = (smoothSum[c] + 0.5 * field.logMedian[c]) / (smoothCount[c] + 0.5)
  }
  field.integrate()
}
