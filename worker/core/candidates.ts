import type { Work } from '../work.ts'
import type { Detrended } from './detrend.ts'
import { findPeaks, keepDistant, parabolaVertex, selectPeaks, type Peaks } from './peaks.ts'
import type { Profile } from './profile.ts'
import { gaussianSmooth } from './smoothing.ts'

export interface CandidateRecipe {
  /** Which lamina marks the year: the darker or the lighter one; auto decides from the profile and says so. */
  lamina: 'dark' | 'light' | 'auto'
  /** Where in that lamina the boundary between years lies, seen downcore: its young edge, its middle, its old edge. */
  edge: 'top' | 'middle' | 'base'
  /** Least topographic prominence, in local standard deviations. */
  prominence: number
  /** Least distance between candidates, path pixels; null: from the local thickness. */
  distance: number | null
}

/** Peaks that may be boundaries, sorted downcore; every column [candidates]. */
export interface Candidates {
  /** Boundary position by the edge rule, path pixels, sub-pixel. */
  position: Float64Array
  /** Position of the peak itself, path pixels, sub-pixel. */
  peak: Float64Array
  /** Height of the peak in the signal, local SD, positive towards the marking lamina. */
  height: Float64Array
  /** Topographic prominence, local SD. */
  prominence: Float64Array
  /** Width at half prominence, path pixels. */
  width: Float64Array
  /** Strength of the edge at the boundary position, local SD per local thickness. */
  edgeStrength: Float64Array
  /** Share of lanes that show the same peak, 0 to 1. */
  continuity: Float64Array
  /** Prominence in the profile's own units, so that faint stretches can be told from strong ones. */
  contrast: Float64Array
  lamina: 'dark' | 'light'
}

/** Least distance between candidates as a share of a layer, when the recipe leaves it open. */
const distanceShare = 0.2

/** Finds the peaks that may be boundaries between years, and what speaks for each of them. */
export function* findCandidates(detrended: Detrended, profile: Profile, recipe: CandidateRecipe): Work<Candidates> {
  yield { stage: 'candidates', done: 0, total: 2 }
  const lamina = recipe.lamina === 'light' ? 'light' : 'dark'
  const sign = lamina === 'dark' ? -1 : 1
  const thickness = detrended.typicalThickness
  const signal = detrended.signal.map((value) => sign * value)
  let peaks = findPeaks(signal, { prominence: recipe.prominence })
  const kept = keepDistant(
    peaks.index,
    peaks.prominence,
    (peak) => recipe.distance ?? Math.max(2, distanceShare * thickness[peaks.index[peak]]),
  )
  peaks = selectPeaks(peaks, (i) => kept[i] === 1)
  const count = peaks.index.length
  const candidates: Candidates = {
    position: new Float64Array(count),
    peak: new Float64Array(count),
    height: new Float64Array(count),
    prominence: peaks.prominence,
    width: peaks.width,
    edgeStrength: new Float64Array(count),
    continuity: new Float64Array(count),
    contrast: new Float64Array(count),
    lamina,
  }
  for (let i = 0; i < count; i++) {
    const row = peaks.index[i]
    const vertex = parabolaVertex(signal[row - 1], signal[row], signal[row + 1])
    candidates.peak[i] = row + 0.5 + vertex.offset
    candidates.height[i] = vertex.height
    candidates.contrast[i] = peaks.prominence[i] * detrended.spread[row]
    const edge = findEdge(signal, peaks, i, recipe.edge)
    candidates.position[i] = recipe.edge === 'middle' ? candidates.peak[i] : edge.position
    candidates.edgeStrength[i] = edge.slope * thickness[row]
  }
  yield { stage: 'candidates', done: 1, total: 2 }
  measureContinuity(candidates, peaks, profile, thickness, sign)
  return candidates
}

/** Steepest rise on the young flank, or steepest fall on the old flank, of a peak; for the middle the steeper of both. */
function findEdge(signal: Float64Array, peaks: Peaks, i: number, rule: CandidateRecipe['edge']) {
  const top = steepest(signal, peaks.index[i], peaks.leftBase[i], -1)
  const base = steepest(signal, peaks.index[i], peaks.rightBase[i], 1)
  if (rule === 'top') return top
  if (rule === 'base') return base
  return top.slope > base.slope ? top : base
}

/** Steepest step between neighbouring samples from a peak down to the foot of its flank, sub-pixel. */
function steepest(signal: Float64Array, peak: number, base: number, direction: -1 | 1) {
  let best = peak
  let slope = 0
  let lowest = signal[peak]
  for (let row = peak; row !== base; row += direction) {
    // The flank ends where the signal has turned up again by a good part of what it fell; the base may lie layers away.
    lowest = Math.min(lowest, signal[row])
    if (signal[row] - lowest > 0.2 * (signal[peak] - lowest)) break
    const step = signal[row] - signal[row + direction]
    if (step > slope) {
      slope = step
      best = row
    }
  }
  const stepAt = (row: number) => signal[row] - signal[row + direction]
  const vertex = parabolaVertex(stepAt(best - direction), slope, stepAt(best + direction))
  const offset = Number.isFinite(vertex.offset) ? vertex.offset : 0
  return { position: best + 0.5 + direction * (0.5 + offset), slope }
}

/** Share of lanes in which a peak of at least half the least prominence stands within a fifth of a layer. */
function measureContinuity(
  candidates: Candidates,
  peaks: Peaks,
  profile: Profile,
  thickness: Float64Array,
  sign: number,
) {
  const { laneCount } = profile
  const rows = profile.intensity.length
  for (let lane = 0; lane < laneCount; lane++) {
    const column = new Float64Array(rows)
    for (let row = 0; row < rows; row++) column[row] = sign * profile.lanes[row * laneCount + lane]
    const smooth = gaussianSmooth(
      column,
      thickness.map((local) => Math.max(0.3, 0.085 * local)),
    )
    const found = findPeaks(smooth)
    let next = 0
    for (let i = 0; i < candidates.peak.length; i++) {
      const row = peaks.index[i]
      const reach = Math.max(1.5, 0.2 * thickness[row])
      while (next < found.index.length && found.index[next] < row - reach) next++
      let best = 0
      for (let k = next; k < found.index.length && found.index[k] <= row + reach; k++) {
        best = Math.max(best, found.prominence[k])
      }
      if (best >= 0.5 * candidates.contrast[i]) candidates.continuity[i] += 1 / laneCount
    }
  }
}
