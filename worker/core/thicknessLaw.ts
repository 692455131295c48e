/**
 * How thick a year may be, in units of the local median thickness.
 *
 * f(d) = (1 - bedShare) [ (1 - wide) LN(d; 1, sigma) + wide LN(d; 1, 1.8 sigma) ]  for d <= longest
 *      + bedShare exp(-(d - bedFrom) / bedMean) / bedMean                           for d > bedFrom
 *
 * LN is the log-normal density with median 1. The wide part is there because thickness need not be log-normal: it gives
 * gamma-like and skewed series the tails they need. The bed part holds layers with an event bed nobody has marked.
 * The density is tabulated once and read by linear interpolation: the table is the law, so that every algorithm over it
 * (sums, maxima, brute force in the tests) sees the same numbers. Beyond `longest` only the exponential is left, which is
 * what lets the semi-Markov passes carry all older sites in one number.
 */
export interface ThicknessLaw {
  /** Standard deviation of log thickness about the local median. */
  sigma: number
  /** Share of layers that hold an unmarked bed. */
  bedShare: number
  /** Cells of the tables per unit of thickness. */
  perUnit: number
  /** Where the tables end, local medians. */
  longest: number
  /** f at k / perUnit, [longest * perUnit + 2]; all tables repeat their last entry, so that interpolation needs no check. */
  density: Float64Array
  /** Share of the density that is not bed, at k / perUnit: which part of a gap may teach the local thickness. */
  regular: Float64Array
  /** Probability of a layer thicker than k / perUnit. */
  survival: Float64Array
  /** Mean thickness, local medians. */
  mean: number
}

/** A bed adds more than this many local medians to its layer; thinner ones cannot be told from a thick year. */
export const bedFrom = 1.8
/** Mean of what a bed adds beyond that, local medians. */
export const bedMean = 8
const perUnit = 256
const wide = 0.08
const wideRatio = 1.8

function logNormal(d: number, sigma: number): number {
  const z = Math.log(d) / sigma
  return Math.exp(-0.5 * z * z) / (d * sigma * Math.sqrt(2 * Math.PI))
}

/** The law for a given spread of log thickness and share of unmarked beds. */
export function thicknessLaw(sigma: number, bedShare: number): ThicknessLaw {
  // Whole cells, so that the table's last entry lies exactly at `longest`.
  const longest = Math.ceil(Math.min(9, Math.max(2.5, Math.exp(3.2 * wideRatio * sigma))))
  const cells = longest * perUnit
  const density = new Float64Array(cells + 2)
  const regular = new Float64Array(cells + 2)
  for (let k = 1; k <= cells; k++) {
    const d = k / perUnit
    regular[k] = (1 - bedShare) * ((1 - wide) * logNormal(d, sigma) + wide * logNormal(d, wideRatio * sigma))
  }
  // What the table cuts off or rounds away goes back, so that the density holds one.
  let sum = 0
  for (let k = 1; k <= cells; k++) sum += regular[k - 1] + regular[k]
  const whole = (1 - bedShare) / (sum / (2 * perUnit))
  for (let k = 1; k <= cells; k++) {
    const d = k / perUnit
    regular[k] *= whole
    density[k] = regular[k] + (d > bedFrom ? bedShare * bedDensity(d) : 0)
    regular[k] = density[k] > 0 ? regular[k] / density[k] : 0
  }
  regular[0] = 1
  regular[cells + 1] = regular[cells]
  density[cells + 1] = density[cells]
  const survival = new Float64Array(cells + 2)
  survival[cells] = bedShare * bedSurvival(longest)
  survival[cells + 1] = survival[cells]
  for (let k = cells; k > 0; k--) survival[k - 1] = survival[k] + (density[k - 1] + density[k]) / (2 * perUnit)
  let mean = bedShare * bedMean * bedSurvival(longest)
  for (let k = 1; k <= cells; k++) mean += (survival[k - 1] + survival[k]) / (2 * perUnit)
  return { sigma, bedShare, perUnit, longest, density, regular, survival, mean }
}

function bedDensity(d: number): number {
  return Math.exp(-(d - bedFrom) / bedMean) / bedMean
}

function bedSurvival(d: number): number {
  return Math.exp(-(d - bedFrom) / bedMean)
}

/** Linear interpolation in a table of the law; d from 0 to `longest`. */
export function inTable(table: Float64Array, d: number): number {
  const at = d * perUnit
  const k = Math.floor(at)
  return table[k] + (at - k) * (table[k + 1] - table[k])
}

/** f(d). */
export function densityAt(law: ThicknessLaw, d: number): number {
  if (!(d > 0)) return 0
  return d <= law.longest ? inTable(law.density, d) : law.bedShare * bedDensity(d)
}

/** Probability that a layer is thicker than d. */
export function survivalAt(law: ThicknessLaw, d: number): number {
  if (!(d > 0)) return 1
  return d <= law.longest ? inTable(law.survival, d) : law.bedShare * bedSurvival(d)
}

/** Density of the distance from an arbitrary depth to the next boundary (the forward recurrence of a stationary renewal process: S(d) / mean; Cox 1962). */
export function recurrenceAt(law: ThicknessLaw, d: number): number {
  return survivalAt(law, d) / law.mean
}

/** Probability that no boundary falls within a stretch of length d taken at an arbitrary depth. */
export function emptyStretch(law: ThicknessLaw, d: number): number {
  if (d > law.longest) return (law.bedShare * bedMean * bedSurvival(d)) / law.mean
  const last = law.survival.length - 2
  const upper = Math.min(last, Math.floor(d * perUnit) + 1)
  let rest = law.bedShare * bedMean * bedSurvival(law.longest)
  for (let k = last; k > upper; k--) rest += (law.survival[k - 1] + law.survival[k]) / (2 * perUnit)
  rest += (upper / perUnit - d) * 0.5 * (survivalAt(law, d) + law.survival[upper])
  return Math.min(1, rest / law.mean)
}
