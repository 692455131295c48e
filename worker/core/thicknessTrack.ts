import { movingMean } from './movingWindow.ts'
import { findPeaks } from './peaks.ts'
import type { Profile } from './profile.ts'
import { gaussianSmooth } from './smoothing.ts'

/** Thinnest layer looked for, path pixels, and the ratio from one scale to the next. */
const thinnest = 3
const scaleStep = Math.SQRT2
/** A profile must hold this many layers of a scale for the scale to be tried. */
const fewestLayers = 4
/** Layers per window in which they are counted. */
const layersPerWindow = 12
/** A lamina must stand out by this many local mean deviations, and by this many of what the lanes disagree by. */
const leastStrength = 1.4
const leastOverNoise = 4
/** Rows with less than this share of the usual deviation are quiet; a window needs this share of rows that are not. */
const quietShare = 0.4
const leastHeard = 0.3
/** A scale fits where the layers seen at it stand at most so many times its own length apart. */
const fitting = 1.5

/**
 * Local layer thickness down a core, path pixels, [rows]. From the finest scale upwards, the profile is smoothed to an
 * eighth of the scale and the laminae that stand out are counted in windows of a dozen layers; the first scale at which they
 * stand no more than about the scale itself apart is the local one. Coming from below, the search stops at layers and does
 * not run on to the slower changes between them; what even and odd lanes do not share is noise and is not counted, so
 * that it does not stop at grain. Windows that fit nowhere (event beds, gaps) take the thickness of their neighbours.
 */
export function trackThickness(profile: Profile): Float64Array {
  const rows = profile.intensity.length
  const { mean, noise } = splitLanes(profile)
  const stations = Math.max(1, Math.min(4096, Math.ceil(rows / 8)))
  const found = new Float64Array(stations).fill(NaN)
  for (let scale = thinnest; scale * fewestLayers <= rows; scale *= scaleStep) {
    const spacing = spacingAt(scale, mean, noise)
    for (let s = 0; s < stations; s++) {
      if (!Number.isNaN(found[s])) continue
      const local = spacing[Math.min(spacing.length - 1, Math.floor(((s + 0.5) * spacing.length) / stations))]
      if (local <= fitting * scale) found[s] = local
    }
  }
  return spreadOut(evened(found), rows)
}

/** Mean of the lanes, and half the difference of even and odd lanes: it has the noise of the mean, and none of the layers. */
function splitLanes({ intensity, lanes, laneCount }: Profile): { mean: Float64Array; noise: Float64Array } {
  const noise = new Float64Array(intensity.length)
  if (laneCount < 2) return { mean: intensity, noise }
  for (let row = 0; row < intensity.length; row++) {
    const sum = [0, 0]
    const count = [0, 0]
    for (let lane = 0; lane < laneCount; lane++) {
      const value = lanes[row * laneCount + lane]
      if (Number.isNaN(value)) continue
      sum[lane % 2] += value
      count[lane % 2]++
    }
    noise[row] = Number.isNaN(intensity[row])
      ? NaN
      : count[0] > 0 && count[1] > 0
        ? 0.5 * (sum[0] / count[0] - sum[1] / count[1])
        : 0
  }
  return { mean: intensity, noise }
}

/** Distance between the laminae that stand out at a scale, path pixels, around each block of rows; Infinity where none does, NaN where all is quiet. */
function spacingAt(scale: number, mean: Float64Array, noise: Float64Array): Float64Array {
  const block = Math.max(1, Math.floor(scale / 10))
  const perScale = scale / block
  const signal = gaussianSmooth(blockMeans(mean, block), perScale / 8)
  const differences = gaussianSmooth(blockMeans(noise, block), perScale / 8)
  const half = Math.round((layersPerWindow * perScale) / 2)
  const trend = movingMean(signal, Math.round(1.5 * perScale))
  const distance = signal.map((value, k) => Math.abs(value - trend[k]))
  const deviation = movingMean(distance, half)
  const noiseTrend = movingMean(differences, Math.round(1.5 * perScale))
  const disagreement = movingMean(
    differences.map((value, k) => Math.abs(value - noiseTrend[k])),
    half,
  )
  const marks = new Float64Array(signal.length)
  for (const column of [signal, signal.map((value) => -value)]) {
    const { index, prominence } = findPeaks(column)
    for (const [p, k] of index.entries()) {
      if (prominence[p] >= Math.max(leastStrength * deviation[k], leastOverNoise * disagreement[k])) marks[k] += 0.5
    }
  }
  // A stretch far quieter than most of the core, such as an event bed, has no laminae of its own and no say.
  const nearby = movingMean(distance, Math.round(perScale))
  const quiet = quietShare * medianOfFinite(nearby)
  for (let k = 0; k < marks.length; k++) if (!(nearby[k] >= quiet)) marks[k] = NaN
  const heard = movingMean(
    marks.map((mark) => (Number.isNaN(mark) ? 0 : 1)),
    half,
  )
  return movingMean(marks, half).map((density, k) =>
    heard[k] < leastHeard ? NaN : density > 0 ? block / density : Infinity,
  )
}

function blockMeans(column: Float64Array, block: number): Float64Array {
  if (block === 1) return column
  const means = new Float64Array(Math.floor(column.length / block))
  for (let k = 0; k < means.length; k++) {
    let sum = 0
    let count = 0
    for (let row = k * block; row < (k + 1) * block; row++) {
      if (Number.isNaN(column[row])) continue
      sum += column[row]
      count++
    }
    means[k] = count > 0 ? sum / count : NaN
  }
  return means
}

function medianOfFinite(column: Float64Array): number {
  const sorted = column.filter((value) => Number.isFinite(value)).sort()
  return sorted.length > 0 ? sorted[sorted.length >> 1] : 0
}

/** Fills stations without a thickness from the nearest with one, and takes out what does not last. */
function evened(found: Float64Array): Float64Array {
  const known = [...found.keys()].filter((s) => !Number.isNaN(found[s]))
  if (known.length === 0) return found
  const filled = new Float64Array(found.length)
  let next = 0
  for (let s = 0; s < found.length; s++) {
    while (next + 1 < known.length && Math.abs(known[next + 1] - s) <= Math.abs(known[next] - s)) next++
    filled[s] = Math.log(found[known[next]])
  }
  const half = Math.max(1, Math.round(found.length / 40))
  const medians = filled.map((_, s) => medianOfFinite(filled.subarray(Math.max(0, s - half), s + half + 1)))
  return movingMean(medians, half).map(Math.exp)
}

function spreadOut(stations: Float64Array, rows: number): Float64Array {
  const thickness = new Float64Array(rows)
  for (let row = 0; row < rows; row++) {
    const at = Math.max(0, Math.min(stations.length - 1, ((row + 0.5) * stations.length) / rows - 0.5))
    const s = Math.floor(at)
    const after = Math.min(stations.length - 1, s + 1)
    thickness[row] = stations[s] + (at - s) * (stations[after] - stations[s])
    if (Number.isNaN(thickness[row])) thickness[row] = Math.max(thinnest, rows / fewestLayers)
  }
  return thickness
}
