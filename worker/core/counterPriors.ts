/** Prior assumptions, all stated with the result. A Beta(a, b) prior has the mean a / (a + b). */
export interface CounterPriors {
  /** Chance that a counter misses a year of average clarity: Beta. */
  missed: [number, number]
  /** Chance that a counter sets a false boundary in a year: Beta. */
  false: [number, number]
  /** Chance that a true boundary, if marked, is called doubtful: Beta. */
  doubtfulIfTrue: [number, number]
  /** The same of a false one: Beta. */
  doubtfulIfFalse: [number, number]
  /** SD of beta: change of the log odds of missing a year for one SD of log spacing; normal around 0. */
  spacingSd: number
  /** SD of gamma: change of the log odds of missing a year in fair and in poor stretches; normal around 0. */
  qualitySd: number
  /** Scale of sigma, the unmeasured scatter of clarity in log odds; half-normal. */
  claritySd: number
  /** tau, how far doubt follows clarity: normal around mean with SD. */
  doubtFollows: { mean: number; sd: number }
}

/**
 * Weak: a few per cent of years missed and false, as the literature has it (1-3 % as the typical error, Ojala et al. 2012
 * and Zolitschka et al. 2015, from memory); with three counters and some hundreds of years the counts overrule them.
 */
export const defaultCounterPriors: CounterPriors = {
  missed: [1, 24],
  false: [1, 49],
  doubtfulIfTrue: [1, 9],
  doubtfulIfFalse: [1, 1],
  spacingSd: 1,
  qualitySd: 1,
  claritySd: 0.5,
  doubtFollows: { mean: 0.3, sd: 0.5 },
}
