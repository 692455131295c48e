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
  lamina: 'dark' | 'light'
}
