import { checkOneOf } from '../check.ts'
import type { Work } from '../work.ts'
import { movingMean } from './movingWindow.ts'
import type { Profile } from './profile.ts'
import { checkFlag, checkLengthOrNull } from './recipeChecks.ts'
import { gaussianSmooth, savitzkyGolay } from './smoothing.ts'
import { trendOf, type TrendMethod } from './trend.ts'
import { typicalThickness } from './typicalThickness.ts'

export interface DetrendRecipe {
  method: TrendMethod
  /** Window of the trend in path pixels; null: from the profile's own layer thickness. */
  window: number | null
  smoothing: 'savitzky-golay' | 'gaussian' | 'none'
  /**
   * Length of the smoother in path pixels: full width at half height of the Gaussian, or window of the Savitzky-Golay
   * filter; null: from the profile's own layer thickness.
   */
  smoothingLength: number | null
  /** Divide by the local standard deviation. */
  standardise: boolean
}

/** A profile without its trend; every column [rows], NaN where the profile is unreadable. */
export interface Detrended {
  trend: Float64Array
  /** Smoothed, detrended and, where asked, in units of the local standard deviation. */
  signal: Float64Array
  /** Whether the signal is in units of the local standard deviation. */
  standardised: boolean
  /** Local standard deviation of the smoothed, detrended intensity, in the profile's units. */
  spread: Float64Array
  /** Typical layer thickness around each row, path pixels, as estimated from the signal's own periodicity. */
  typicalThickness: Float64Array
}

/** A window of the trend spans this many layers when the recipe leaves it open. */
const layersPerWindow = 6
/** Length of the smoother as a share of a layer, when the recipe leaves it open; a Savitzky-Golay window smooths like a Gaussian half as long. */
const smoothingShare = { gaussian: 0.15, 'savitzky-golay': 0.3 }
/** Degree of the Savitzky-Golay polynomial. */
const smoothingDegree = 2
/** Full width at half height of a Gaussian, in standard deviations: 2 sqrt(2 ln 2). */
const widthAtHalf = 2 * Math.sqrt(2 * Math.LN2)
/** The local standard deviation is taken over so many layers to either side. */
const layersPerSpread = 5
/** A stretch quieter than this share of the usual spread holds no layers: dividing by less would make grain look like them. */
const leastSpread = 0.05

/** Removes the trend of a profile, smooths what is left and brings it to a common scale. */
export function* detrendProfile(profile: Profile, recipe: DetrendRecipe): Work<Detrended> {
  checkDetrendRecipe(recipe)
  const { intensity } = profile
  const thickness = yield* typicalThickness(intensity)
  yield { stage: 'trend', done: 0, total: 2 }
  const trend = trendOf(
    intensity,
    recipe.method,
    thickness.map((local) => recipe.window ?? layersPerWindow * local),
  )
  yield { stage: 'trend', done: 1, total: 2 }
  const rest = intensity.map((value, row) => value - trend[row])
  const smooth = smoothed(rest, recipe, thickness)
  const spread = localSpread(smooth, thickness)
  const signal = recipe.standardise
    ? smooth.map((value, row) => (spread[row] > 0 ? value / spread[row] : value))
    : smooth.slice()
  return { trend, signal, standardised: recipe.standardise, spread, typicalThickness: thickness }
}

function smoothed(rest: Float64Array, recipe: DetrendRecipe, thickness: Float64Array): Float64Array {
  const { smoothing, smoothingLength } = recipe
  if (smoothing === 'none') return rest
  const lengthAt = (row: number) => smoothingLength ?? smoothingShare[smoothing] * thickness[row]
  if (smoothing === 'gaussian')
    return gaussianSmooth(
      rest,
      thickness.map((_, row) => lengthAt(row) / widthAtHalf),
    )
  // The nearest odd number; below five samples a parabola smooths nothing.
  const windows = Int32Array.from(thickness, (_, row) =>
    Math.max(smoothingLength === null ? 5 : 1, 2 * Math.round((lengthAt(row) - 1) / 2) + 1),
  )
  return savitzkyGolay(rest, windows, smoothingDegree)
}

/**
 * Local standard deviation: sqrt(pi / 2) times the mean absolute value over ten layers, which for a normal signal is its
 * standard deviation and is moved less by outliers; never less than a twentieth of the median over the profile.
 */
function localSpread(column: Float64Array, thickness: Float64Array): Float64Array {
  const half = Int32Array.from(thickness, (local) => Math.max(1, Math.round(layersPerSpread * local)))
  const spread = movingMean(column.map(Math.abs), half).map((value) => value * Math.sqrt(Math.PI / 2))
  const sorted = spread.filter((value) => Number.isFinite(value)).sort()
  const least = sorted.length > 0 ? leastSpread * sorted[sorted.length >> 1] : 0
  return spread.map((value) => (value < least ? least : value))
}

/** Rejects a recipe that makes no sense, with the field named. */
export function checkDetrendRecipe(recipe: DetrendRecipe): void {
  const field = 'recipe.detrend'
  checkOneOf(`${field}.method`, recipe.method, ['moving-median', 'moving-mean', 'loess', 'high-pass', 'none'])
  checkOneOf(`${field}.smoothing`, recipe.smoothing, ['savitzky-golay', 'gaussian', 'none'])
  checkLengthOrNull(`${field}.window`, recipe.window, 3)
  checkLengthOrNull(`${field}.smoothingLength`, recipe.smoothingLength, 0.5)
  checkFlag(`${field}.standardise`, recipe.standardise)
}
