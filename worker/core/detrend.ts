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
  /** Typical layer thickness around each row, path pixels, as estimated from the signal's own periodicity. */
  typicalThickness: Float64Array
}
