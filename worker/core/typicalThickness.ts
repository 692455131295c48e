import type { Work } from '../work.ts'
import { movingMean } from './movingWindow.ts'
import { findPeaks, keepDistant } from './peaks.ts'
import { periodicityOf } from './periodicity.ts'
import { strongestRidge } from './ridge.ts'
import { gaussianSmooth } from './smoothing.ts'

/** Thinnest layer looked for, rows: a couplet of two laminae of one and a half pixels. */
const thinnest = 3
/** The thickest looked for, rows; thicker ones call for a coarser scan. */
const thickest = 600
/** A profile must hold this many layers of a thickness for it to be looked for. */
const fewestLayers = 10

/**
 * Typical layer thickness around each row of a profile, rows: the distance at which the profile repeats itself, followed down
 * the core (periodicity.ts, ridge.ts), and doubled where laminae alternate between strong and weak, two to a year.
 * A profile with nothing to go by (short, empty, flat) gets the same thickness everywhere.
 */
export function* typicalThickness(column: Float64Array): Work<Float64Array> {
  const rows = column.length
  const longest = Math.max(thinnest, Math.min(thickest, rows / fewestLayers))
  const search = periodicityOf(column, thinnest, longest)
  for (;;) {
    const step = search.next()
    if (step.done) {
      const ridge = strongestRidge(step.value, rows)
      return doubledWhereAlternating(column, alongRows(ridge, rows))
    }
    yield { stage: 'thickness', done: step.value, total: 1 }
  }
}

/** Values at stations that divide the rows evenly, by straight lines between their middles. */
function alongRows(stations: Float64Array, rows: number): Float64Array {
  const values = new Float64Array(rows)
  const last = stations.length - 1
  for (let row = 0; row < rows; row++) {
    const place = Math.max(0, Math.min(last, ((row + 0.5) * stations.length) / rows - 0.5))
    const before = Math.min(Math.max(0, last - 1), Math.floor(place))
    const after = Math.min(last, before + 1)
    values[row] = stations[before] + (place - before) * (stations[after] - stations[before])
  }
  return values
}

/** Laminae on either side that decide whether they alternate. */
const laminaeAround = 64
/** Of few laminae the alternation may be chance: it is taken by n / (n + this). */
const doubtfulLaminae = 20
/** Correlation of each lamina's height with the next but one, less that with the next, from which they are taken to alternate. */
const leastAlternation = 0.55
/** Laminae that stand closer than this share of the thickness are two to each already. */
const leastSpacing = 0.82
/** Standard deviation of the smoother, and least distance of laminae, as shares of the thickness. */
const smoothingShare = 0.1
const distanceShare = 0.35

/**
 * Two laminae a year, of unlike strength, repeat at half a year already. Then strong and weak ones take turns: heights of
 * neighbours oppose each other, heights of every other one agree, for dark and light laminae alike. Drawn profiles of one
 * lamina a year stay below 0.5, those with a second lamina in most years lie above 0.7 (median over both kinds). Where two
 * laminae stand within each thickness, it is that of the year already.
 */
function doubledWhereAlternating(column: Float64Array, thickness: Float64Array): Float64Array {
  const smooth = gaussianSmooth(
    column,
    thickness.map((local) => Math.max(0.4, smoothingShare * local)),
  )
  const half = Int32Array.from(thickness, (local) => Math.round(local))
  const trend = movingMean(movingMean(column, half), half)
  const dark = alternationOf(
    smooth.map((value, row) => trend[row] - value),
    thickness,
  )
  const light = alternationOf(
    smooth.map((value, row) => value - trend[row]),
    thickness,
  )
  return thickness.map((local, row) => ((dark[row] + light[row]) / 2 > leastAlternation ? 2 * local : local))
}

/** How much the heights of the peaks around each row alternate, -2 to 2. */
function alternationOf(signal: Float64Array, thickness: Float64Array): Float64Array {
  const { index, prominence } = findPeaks(signal)
  const kept = keepDistant(index, prominence, (peak) => distanceShare * thickness[index[peak]])
  const laminae = index.filter((_, peak) => kept[peak] === 1)
  const heights = Float64Array.from(laminae, (row) => signal[row])
  const level = movingMean(heights, 8)
  const height = heights.map((value, lamina) => value - level[lamina])
  const products = (apart: number) => height.map((value, lamina) => value * (height[lamina + apart] ?? 0))
  const [squares, next, nextButOne] = [0, 1, 2].map((apart) => movingMean(products(apart), laminaeAround))
  const alternation = new Float64Array(signal.length)
  let lamina = 0
  for (let row = 0; row < signal.length; row++) {
    while (lamina + 1 < laminae.length && laminae[lamina + 1] <= row) lamina++
    if (!(squares[lamina] > 0)) continue
    const first = Math.max(0, lamina - laminaeAround)
    const last = Math.min(laminae.length - 1, lamina + laminaeAround)
    const held = last + 1 - first
    if (!(laminae[last] - laminae[first] > leastSpacing * thickness[row] * (held - 1))) continue
    alternation[row] = (((nextButOne[lamina] - next[lamina]) / squares[lamina]) * held) / (held + doubtfulLaminae)
  }
  return alternation
}
