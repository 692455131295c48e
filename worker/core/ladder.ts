export interface LadderRecipe {
  /** Expected layer thickness, path pixels; null: from the profile. */
  thickness: number | null
}

/** A stretch of the path that holds no countable years of its own: `event` took no time, `unreadable` took unknown time. */
export interface Span {
  from: number
  to: number
  kind: 'event' | 'unreadable' | 'hiatus'
}

/** The ladder: every candidate with its probability, and the most probable choice; columns [sites], sorted downcore. */
export interface Ladder {
  /** Path pixels. */
  position: Float64Array
  /** Posterior probability that the site is the boundary between two varve years. */
  probability: Float64Array
  /** 1 where the site belongs to the most probable ladder. */
  chosen: Uint8Array
  /** Local median thickness the model settled on, path pixels. */
  thickness: Float64Array
  expectedYears: number
  sdYears: number
  years95: [number, number]
}
