/** A stretch of the core between two places that no ladder spans: what the semi-Markov model is run over; see semiMarkov.ts. */
export interface Stretch {
  /** Thickness coordinate of each site, not decreasing, [sites]. */
  u: Float64Array
  /** How many times likelier what is seen at the site is if it is a boundary than if it is none, [sites]. */
  weight: Float64Array
  /** 1: the site is a boundary for certain, [sites]. */
  forced: Uint8Array
  /** 1: something is seen at the site; where it is no boundary it is a lamina inside a year, [sites]. */
  shows: Uint8Array
  /** Log of the thickness expected of a layer whose young boundary is the site, over the local median; from the layer above it, [sites]. */
  expected: Float64Array
  start: number
  end: number
}
