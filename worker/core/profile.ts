import { checkInteger, checkOneOf, checkWithin, Fault } from '../check.ts'
import type { Samples, ScanWork } from '../work.ts'
import { regionsOf } from './bands.ts'
import { intensityReader, type Channel } from './intensity.ts'
import { bucketMedian, trimmedMeanOf } from './quickselect.ts'
import { checkFlag } from './recipeChecks.ts'
import { evenCuts } from './runs.ts'
import type { ScanShape } from './scan.ts'
import { ribbonOf, type Strip } from './strip.ts'
import { blockCuts, tiltMeter, tiltReach, type TiltMeter } from './tilt.ts'
import { checkTransect, steepestTilt, type Transect } from './transect.ts'

export type { Channel } from './intensity.ts'

export interface ProfileRecipe {
  channel: Channel
  /** Undo the sRGB transfer curve before averaging. */
  linear: boolean
  across: 'median' | 'mean' | 'trimmed'
  /** Parallel lanes across the width, for lateral evidence. */
  lanes: number
  /** A row with a smaller share of usable pixels is unreadable. */
  usableShare: number
}

/** Intensity along a transect; row i is the sample at path distance i + 0.5 scan pixels. */
export interface Profile {
  /** Intensity in the file's units (0-255 or 0-65535; L* 0-100), [rows]; NaN where the row is unreadable. */
  intensity: Float64Array
  /** Share of usable pixels in each row, [rows]. */
  usable: Float32Array
  /** Intensity of each lane, [rows x laneCount], row-major, from left to right; NaN where unreadable. */
  lanes: Float32Array
  laneCount: number
  /** Bedding tilt used at each row, radians, [rows]. */
  tilt: Float32Array
}

/** The trimmed mean leaves out this share of the pixels of a row at either end (common practice, no source). */
const trimmedShare = 0.2
/** Rows between two reports of progress. */
const rowsAtOnce = 2048

/**
 * Reads the intensity along a transect, row by row across its width, sheared along the bedding. The scan is read in bands;
 * where the tilt is to be estimated, a band is summarised when the next one has been measured, because the tilt of a row
 * depends on the beds to both sides. Throws a Fault for a transect or recipe that makes no sense.
 */
export function* extractProfile(shape: ScanShape, transect: Transect, recipe: ProfileRecipe): ScanWork<Profile> {
  checkTransect(shape, transect)
  checkProfileRecipe(recipe)
  const ribbon = ribbonOf(transect)
  const { rows, offsets } = ribbon
  const reader = intensityReader(shape, recipe.channel, recipe.linear)
  const cuts = blockCuts(rows)
  const steepest = transect.tilt === null ? steepestTilt : Math.abs(transect.tilt)
  const reach = Math.ceil((transect.width / 2) * Math.tan(steepest))
  const margin = (steepest > 0 ? reach + 1 : 0) + (transect.tilt === null ? tiltReach : 0)
  const bands = regionsOf(shape, transect, { margin: margin + 1, side: 1, cuts })
  const meter = transect.tilt === null ? tiltMeter(cuts, offsets) : levelMeter(Math.tan(transect.tilt))
  const profile = emptyProfile(rows, Math.min(recipe.lanes, offsets.length))
  const summarise = rowSummary(
    profile,
    offsets.length,
    recipe,
    recipe.channel === 'lightness' ? 100 : shape.bits === 8 ? 255 : 65535,
  )
  const scratch = new Float32Array(offsets.length)

  let waiting: { strip: Strip; from: number; to: number } | null = null
  let block = 0
  for (const band of bands) {
    yield { stage: 'profile', done: band.from, total: rows }
    const samples = yield { read: band.region }
    const strip = ribbon.stripOf(band, samplesOrFault(samples), reader, margin)
    let end = block
    while (cuts[end] < band.to) end++
    meter.feed(strip, block, end)
    block = end
    if (waiting) yield* summariseRows(waiting.strip, waiting.from, waiting.to)
    waiting = { strip, from: band.from, to: band.to }
  }
  if (waiting) yield* summariseRows(waiting.strip, waiting.from, waiting.to)
  return profile

  function* summariseRows(strip: Strip, from: number, to: number): ScanWork<void> {
    for (let row = from; row < to; row += rowsAtOnce) {
      yield { stage: 'profile', done: row, total: rows }
      summariseBlock(strip, row, Math.min(to, row + rowsAtOnce))
    }
  }

  /** A plain loop of its own: inside a generator it would run at a fraction of the speed. */
  function summariseBlock(strip: Strip, from: number, to: number): void {
    for (let row = from; row < to; row++) {
      const slope = meter.slopeAt(row)
      profile.tilt[row] = Math.atan(slope)
      summarise(row, strip.sample(row, slope, scratch))
    }
  }
}

function levelMeter(slope: number): TiltMeter {
  return { feed: () => undefined, slopeAt: () => slope }
}

function samplesOrFault(samples: Samples | undefined): Samples {
  if (!samples) throw new Fault('internal', 'samples', samples, 'a region of the scan was asked for, and none came')
  return samples
}

/** Rejects a recipe that makes no sense, with the field named. */
export function checkProfileRecipe(recipe: ProfileRecipe): void {
  checkOneOf('recipe.profile.channel', recipe.channel, ['luminance', 'lightness', 'red', 'green', 'blue'])
  checkOneOf('recipe.profile.across', recipe.across, ['median', 'mean', 'trimmed'])
  checkFlag('recipe.profile.linear', recipe.linear)
  checkInteger('recipe.profile.lanes', recipe.lanes, 1, 1000)
  checkWithin('recipe.profile.usableShare', recipe.usableShare, 0, 1)
}

function emptyProfile(rows: number, laneCount: number): Profile {
  return {
    intensity: new Float64Array(rows).fill(NaN),
    usable: new Float32Array(rows),
    lanes: new Float32Array(rows * laneCount).fill(NaN),
    laneCount,
    tilt: new Float32Array(rows),
  }
}

/** Turns the samples of a row into its intensity, usable share and lanes; no intensity exceeds `most`. */
function rowSummary(profile: Profile, samples: number, recipe: ProfileRecipe, most: number) {
  const usable = new Float32Array(samples)
  const median = bucketMedian(most)
  const { laneCount } = profile
  const laneEnds = evenCuts(samples, laneCount)

  return (at: number, values: Float32Array): void => {
    let count = 0
    let total = 0
    for (let lane = 0; lane < laneCount; lane++) {
      const before = count
      let sum = 0
      for (let k = laneEnds[lane]; k < laneEnds[lane + 1]; k++) {
        const value = values[k]
        if (value === value) {
          sum += value
          usable[count++] = value
        }
      }
      total += sum
      const inLane = count - before
      if (inLane > 0 && inLane >= recipe.usableShare * (laneEnds[lane + 1] - laneEnds[lane])) {
        profile.lanes[at * laneCount + lane] = sum / inLane
      }
    }
    profile.usable[at] = count / samples
    if (count === 0 || count < recipe.usableShare * samples) return
    profile.intensity[at] =
      recipe.across === 'median'
        ? median(usable, count)
        : recipe.across === 'mean'
          ? total / count
          : trimmedMeanOf(usable, count, trimmedShare)
  }
}
