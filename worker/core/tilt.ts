import { evenCuts } from './runs.ts'
import { coherence, gradientKernels, gradientsOf, type Gradients } from './structureTensor.ts'
import type { Strip } from './strip.ts'
import { steepestTilt } from './transect.ts'

/** Rows of a block: the bedding tilt is measured block by block. */
export const rowsPerBlock = 32
/** Standard deviation of the gradient kernels along the path, rows. */
const sigmaAlong = 1.5
/** The same across, in merged samples. */
const sigmaAcross = 1.25
/** Neighbouring samples of a row are merged to this many at least: the bedding changes slowly across, and time is saved. */
const leastMerged = 32
/** A strip of fewer samples shows no tilt worth following: its edges move by less than two pixels. */
const leastSamples = 12
/** A block is cut into this many cells across, each with a direction of its own, so that a crack or the core's edge spoils one. */
const cellsAcross = 4
/** Cells whose gradients lie less along one line than this tell nothing of the bedding. */
const leastCoherence = 0.3
/**
 * The variance of the direction of n gradients is (1 - c^2) / (4 c^2 n) for a coherence c (from the two eigenvalues of the
 * tensor, the smaller taken as noise): cells weigh by its inverse, up to this many times n, so that no single one decides.
 */
const mostWeight = 5
/** Blocks to either side that have a say in a block's tilt. */
export const blocksAround = 8

/** Rows beyond a band that its gradients reach. */
export const tiltReach = gradientKernels(sigmaAlong).radius

/** Measures the tilt of the bedding along a ribbon, fed band by band. */
export interface TiltMeter {
  /** Measures the blocks first to last (not included), whose rows and `tiltReach` rows around them the strip holds. */
  feed(strip: Strip, first: number, last: number): void
  /** Tangent of the tilt at a row, from the blocks around it that have been fed. */
  slopeAt(row: number): number
}

/** First row of each block and the end of the last, [blocks + 1]; the same blocks from either end. */
export function blockCuts(rows: number): Int32Array {
  return evenCuts(rows, Math.max(1, Math.round(rows / rowsPerBlock)))
}

export function tiltMeter(cuts: Int32Array, offsets: Float64Array): TiltMeter {
  const blocks = cuts.length - 1
  const merge = Math.max(1, Math.floor(offsets.length / leastMerged))
  const columns = Math.floor(offsets.length / merge)
  const slopes = new Float64Array(blocks * cellsAcross)
  const weights = new Float64Array(blocks * cellsAcross)
  const cellCuts = evenCuts(columns, cellsAcross)
  const smoothed = new Float64Array(blocks).fill(NaN)
  const spacing = offsets.length > 1 ? Math.abs(offsets[1] - offsets[0]) * merge : 1

  function feed(strip: Strip, first: number, last: number): void {
    if (offsets.length < leastSamples) return
    const from = cuts[first] - tiltReach
    const rows = cuts[last] + tiltReach - from
    const raster = new Float32Array(rows * columns)
    const scratch = new Float32Array(offsets.length)
    for (let row = 0; row < rows; row++) {
      const values = strip.sample(from + row, 0, scratch)
      for (let column = 0; column < columns; column++) {
        let sum = 0
        for (let k = column * merge; k < (column + 1) * merge; k++) sum += values[k]
        raster[row * columns + column] = sum / merge
      }
    }
    const gradients = gradientsOf(raster, rows, columns, sigmaAcross, sigmaAlong)
    for (let block = first; block < last; block++) {
      for (let cell = 0; cell < cellsAcross; cell++) {
        const { slope, weight } = slopeOfCell(gradients, columns, {
          top: cuts[block] - from,
          bottom: cuts[block + 1] - from,
          left: cellCuts[cell],
          right: cellCuts[cell + 1],
        })
        slopes[block * cellsAcross + cell] = slope / spacing
        weights[block * cellsAcross + cell] = Math.abs(slope / spacing) <= Math.tan(steepestTilt) ? weight : 0
      }
    }
  }

  function slopeOfBlock(block: number): number {
    if (!Number.isNaN(smoothed[block])) return smoothed[block]
    const first = Math.max(0, block - blocksAround)
    const last = Math.min(blocks, block + blocksAround + 1)
    smoothed[block] = weightedMedian(
      slopes.subarray(first * cellsAcross, last * cellsAcross),
      weights.subarray(first * cellsAcross, last * cellsAcross),
    )
    return smoothed[block]
  }

  function slopeAt(row: number): number {
    if (offsets.length < leastSamples) return 0
    let block = Math.min(blocks - 1, Math.floor((row * blocks) / cuts[blocks]))
    const centre = (b: number) => (cuts[b] + cuts[b + 1]) / 2
    if (row + 0.5 < centre(block)) block--
    if (block < 0) return slopeOfBlock(0)
    if (block + 1 >= blocks) return slopeOfBlock(blocks - 1)
    const share = (row + 0.5 - centre(block)) / (centre(block + 1) - centre(block))
    return slopeOfBlock(block) + share * (slopeOfBlock(block + 1) - slopeOfBlock(block))
  }
  return { feed, slopeAt }
}

/**
 * Slope of the beds in a cell, in rows per merged sample, by the direction of its gradients. The kernels let through more noise
 * along than across, or less; the gradients across are scaled so that noise is equal in both and turns the direction neither way.
 */
function slopeOfCell(
  { across, along }: Gradients,
  columns: number,
  cell: { top: number; bottom: number; left: number; right: number },
): { slope: number; weight: number } {
  let count = 0
  let sumX = 0
  let sumY = 0
  let xx = 0
  let xy = 0
  let yy = 0
  for (let row = cell.top; row < cell.bottom; row++) {
    for (let at = row * columns + cell.left; at < row * columns + cell.right; at++) {
      const x = across[at] * noiseRatio
      const y = along[at]
      if (Number.isNaN(x + y)) continue
      count++
      sumX += x
      sumY += y
      xx += x * x
      xy += x * y
      yy += y * y
    }
  }
  if (count < 2) return { slope: 0, weight: 0 }
  // About their means: light that falls off across the core is no bedding.
  const tensor = { xx: xx - (sumX * sumX) / count, xy: xy - (sumX * sumY) / count, yy: yy - (sumY * sumY) / count }
  const clear = coherence(tensor)
  const angle = 0.5 * Math.atan2(2 * tensor.xy, tensor.yy - tensor.xx)
  return {
    slope: -Math.tan(angle) / noiseRatio,
    weight: clear > leastCoherence ? Math.min(mostWeight, (clear * clear) / (1 - clear * clear)) * count : 0,
  }
}

const energy = (kernel: Float64Array) => kernel.reduce((sum, value) => sum + value * value, 0)
/** Standard deviation of white noise in the gradients along, over that in the gradients across. */
const noiseRatio = (() => {
  const side = gradientKernels(sigmaAcross)
  const down = gradientKernels(sigmaAlong)
  return Math.sqrt((energy(down.derive) * energy(side.smooth)) / (energy(down.smooth) * energy(side.derive)))
})()

/** Value at which half of the weight lies to either side; 0 where there is no weight: beds of unknown tilt are taken as level. */
function weightedMedian(values: Float64Array, weights: Float64Array): number {
  const order = Array.from(values.keys())
    .filter((i) => weights[i] > 0)
    .sort((a, b) => values[a] - values[b])
  const total = order.reduce((sum, i) => sum + weights[i], 0)
  let passed = 0
  for (const i of order) {
    passed += weights[i]
    if (passed >= total / 2) return values[i]
  }
  return 0
}
