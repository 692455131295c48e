/** Which value of a pixel is read: BT.709 luminance, CIE L*, one channel, or the grey value itself for grey scans. */
export type Channel = 'luminance' | 'lightness' | 'red' | 'green' | 'blue'

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
  /** Intensity of each lane, [rows x laneCount], row-major; NaN where unreadable. */
  lanes: Float32Array
  laneCount: number
  /** Bedding tilt used at each row, radians, [rows]. */
  tilt: Float32Array
}
