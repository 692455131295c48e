import { checkOneOf, checkWithin } from '../check.ts'
import type { Work } from '../work.ts'
import type { Detrended } from './detrend.ts'
import { findPeaks, keepDistant, parabolaVertex, selectPeaks, type Peaks } from './peaks.ts'
import type { Profile } from './profile.ts'
import { checkLengthOrNull } from './recipeChecks.ts'
import { gaussianSmoother } from './smoothing.ts'

export interface CandidateRecipe {
  /** Which lamina marks the year: the darker or the lighter one; auto: see `markingLamina`. The answer stands in the candidates. */
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
  checkCandidateRecipe(recipe)
  yield { stage: 'candidates', done: 0, total: profile.laneCount + 1 }
  const lamina = recipe.lamina === 'auto' ? markingLamina(detrended.signal, recipe.edge) : recipe.lamina
  const sign = lamina === 'dark' ? -1 : 1
  const signal = inSpreads(detrended, sign)
  const peaks = peaksOf(signal, detrended, recipe)
  const candidates = describePeaks(signal, peaks, detrended, recipe, lamina)
  yield* measureContinuity(candidates, peaks, profile, detrended.typicalThickness, sign)
  return candidates
}

/** The signal in local standard deviations, positive towards the marking lamina. */
function inSpreads({ signal, spread, standardised }: Detrended, sign: number): Float64Array {
  return signal.map((value, row) => sign * (standardised || !(spread[row] > 0) ? value : value / spread[row]))
}

function peaksOf(signal: Float64Array, { typicalThickness }: Detrended, recipe: CandidateRecipe): Peaks {
  const peaks = findPeaks(signal, { prominence: recipe.prominence })
  const kept = keepDistant(
    peaks.index,
    peaks.prominence,
    (peak) => recipe.distance ?? Math.max(2, distanceShare * typicalThickness[peaks.index[peak]]),
  )
  return selectPeaks(peaks, (i) => kept[i] === 1)
}

function describePeaks(
  signal: Float64Array,
  peaks: Peaks,
  { spread, typicalThickness }: Detrended,
  { edge }: CandidateRecipe,
  lamina: 'dark' | 'light',
): Candidates {
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
    candidates.contrast[i] = peaks.prominence[i] * spread[row]
    const found = findEdge(signal, peaks, i, edge)
    candidates.position[i] = edge === 'middle' ? candidates.peak[i] : found.position
    candidates.edgeStrength[i] = found.slope * typicalThickness[row]
  }
  return candidates
}

/** Skewness below which neither kind of lamina has the sharper contacts. */
const clearSkewness = 0.15

/**
 * Which lamina marks the year when the recipe leaves it open: the one whose edge named by the rule is the sharp contact. The
 * clay that settles in winter grades up from the silt below it and is cut off by the next summer: downcore the intensity
 * jumps at its top and comes back slowly. A scan in which that jump is towards dark has dark winters, the other way round
 * (a radiograph shown as density) light ones; the skewness of the steps from row to row tells which. For the middle of a
 * lamina the thinner kind marks the year, told by the skewness of the signal. Without a clear answer: dark.
 */
export function markingLamina(signal: Float64Array, edge: CandidateRecipe['edge']): 'dark' | 'light' {
  const steps = signal.map((value, row) => (row > 0 ? value - signal[row - 1] : NaN))
  const skewness = edge === 'middle' ? skewnessOf(signal) : skewnessOf(steps) * (edge === 'top' ? 1 : -1)
  return skewness > clearSkewness ? 'light' : 'dark'
}

/** Third standardised moment about zero, values cut off at three deviations so that a crack does not decide. */
function skewnessOf(column: Float64Array): number {
  const readable = column.filter((value) => Number.isFinite(value))
  const deviation = Math.sqrt(readable.reduce((sum, value) => sum + value * value, 0) / readable.length)
  if (!(deviation > 0)) return 0
  const cubes = readable.reduce((sum, value) => sum + Math.max(-3, Math.min(3, value / deviation)) ** 3, 0)
  return cubes / readable.length
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

/** The smoother of the lanes, a standard deviation as a share of a layer: lanes are noisier than the profile. */
const laneSmoothing = 0.085
/** A lane shows a peak that stands within this share of a layer, and at least these many pixels, of the candidate … */
const laneReach = 0.2
const leastLaneReach = 1.5
/** … and has at least this share of the candidate's prominence. */
const laneShare = 0.5

/** Share of lanes that show the peak of each candidate. */
function* measureContinuity(
  candidates: Candidates,
  { index }: Peaks,
  profile: Profile,
  thickness: Float64Array,
  sign: number,
): Work<void> {
  const { lanes, laneCount } = profile
  const rows = profile.intensity.length
  const smooth = gaussianSmoother(
    thickness.map((local) => Math.max(0.3, laneSmoothing * local)),
    rows,
  )
  const column = new Float64Array(rows)
  for (let lane = 0; lane < laneCount; lane++) {
    yield { stage: 'candidates', done: lane + 1, total: laneCount + 1 }
    for (let row = 0; row < rows; row++) column[row] = sign * lanes[row * laneCount + lane]
    const found = findPeaks(smooth(column))
    let next = 0
    for (let i = 0; i < index.length; i++) {
      const reach = Math.max(leastLaneReach, laneReach * thickness[index[i]])
      while (next < found.index.length && found.index[next] < index[i] - reach) next++
      let best = 0
      for (let k = next; k < found.index.length && found.index[k] <= index[i] + reach; k++) {
        best = Math.max(best, found.prominence[k])
      }
      if (best >= laneShare * candidates.contrast[i]) candidates.continuity[i] += 1 / laneCount
    }
  }
}

/** Rejects a recipe that makes no sense, with the field named. */
export function checkCandidateRecipe(recipe: CandidateRecipe): void {
  const field = 'recipe.candidates'
  checkOneOf(`${field}.lamina`, recipe.lamina, ['dark', 'light', 'auto'])
  checkOneOf(`${field}.edge`, recipe.edge, ['top', 'middle', 'base'])
  checkWithin(`${field}.prominence`, recipe.prominence, 0, 1000)
  checkLengthOrNull(`${field}.distance`, recipe.distance, 0)
}
