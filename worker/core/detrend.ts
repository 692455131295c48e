import type { Work } from '../work.ts'
import { gaussianSmooth, savitzkyGolay } from './smoothing.ts'
import { movingMean, movingMedian } from './movingWindow.ts'
import type { Profile } from './profile.ts'
import { trackThickness } from './thicknessTrack.ts'

export interface DetrendRecipe {
  method: 'moving-median' | 'moving-mean' | 'loess' | 'high-pass' | 'none'
  /** Window of the trend in path pixels; null: from the profile's own layer thickness. */
  window: number | null
  smoothing: 'savitzky-golay' | 'gaussian' | 'none'
  /** Length of the smoother in path pixels; null: from the profile's own layer thickness. */
  smoothingLength: number | null
  /** Divide by the local standard deviation. */
  standardise: boolean
}

/** A profile without its trend; every column [rows], NaN where the profile is unreadable. */
export interface Detrended {
  trend: Float64Array
  /** Smoothed, detrended and, where asked, in units of the local standard deviation. */
  signal: Float64Array
  /** Local standard deviation of the detrended intensity, in the profile's units. */
  spread: Float64Array
  /** Typical layer thickness around each row, path pixels, as estimated from the signal's own periodicity. */
  typicalThickness: Float64Array
}

/** A window of the trend spans this many layers when the recipe leaves it open. */
const layersPerWindow = 6
/** Full width at half height of the smoother, as a share of a layer, when the recipe leaves it open. */
const smoothingShare = 0.15

/** Removes the trend of a profile, smooths what is left and brings it to a common scale. */
export function* detrendProfile(profile: Profile, recipe: DetrendRecipe): Work<Detrended> {
  const { intensity } = profile
  yield { stage: 'thickness', done: 0, total: 3 }
  const thickness = trackThickness(profile)
  yield { stage: 'trend', done: 1, total: 3 }
  const half = Int32Array.from(thickness, (local) =>
    Math.max(1, Math.round((recipe.window ?? layersPerWindow * local) / 2)),
  )
  const trend = recipe.method === 'moving-mean' ? movingMean(intensity, half) : movingMedian(intensity, half)
  const rest = intensity.map((value, row) => value - trend[row])
  yield { stage: 'smoothing', done: 2, total: 3 }
  const length = thickness.map((local) => recipe.smoothingLength ?? smoothingShare * local)
  const smooth =
    recipe.smoothing === 'none'
      ? rest
      : recipe.smoothing === 'gaussian'
        ? gaussianSmooth(
            rest,
            length.map((value) => value / 2.3548),
          )
        : savitzkyGolay(rest, Math.max(3, Math.round(length[0])), 2)
  const spread = localSpread(smooth, thickness)
  const signal = recipe.standardise
    ? smooth.map((value, row) => (spread[row] > 0 ? value / spread[row] : value))
    : smooth
  return { trend, signal, spread, typicalThickness: thickness }
}

/** sqrt(pi / 2) times the mean absolute value over ten layers: the standard deviation of a normal signal, less moved by outliers. */
export function localSpread(column: Float64Array, thickness: Float64Array): Float64Array {
  const half = Int32Array.from(thickness, (local) => Math.max(1, Math.round(5 * local)))
  return movingMean(column.map(Math.abs), half).map((value) => value * Math.sqrt(Math.PI / 2))
}
