/**
 * The counting error by the published conventions, each under its own name, none mixed with another. Which one a paper
 * means is rarely clear from "+-" alone, so every figure here carries its name to the table.
 */
import { checkAtLeast, checkFinite, checkPositive, checkSameLength, checkWithin, Fault } from '../check.ts'
import { studentQuantile } from './incompleteBeta.ts'

/** Totals of repeat counts of one stretch and their spread; spreads are null with a single count, which has none. */
export interface RepeatCountError {
  counts: number[]
  mean: number
  median: number
  min: number
  max: number
  range: number
  halfRange: number
  /** Sample standard deviation, sqrt(S / (k - 1)), S the sum of squared deviations from the mean. */
  sd: number | null
  /** Root mean square deviation, sqrt(S / k). */
  rms: number | null
  /** Standard error of the mean, SD / sqrt(k), and the half-width of its 95 % interval by Student's t. */
  se: number | null
  halfWidth95: number | null
  /** Percent of the mean; the percent error of the literature is that of the SD. */
  percent: { sd: number | null; rms: number | null; se: number | null; halfRange: number }
  /** +(max - best) / -(best - min) around the best count, here the mean unless one was chosen. */
  asymmetric: { best: number; plus: number; minus: number; percentPlus: number; percentMinus: number }
}

/**
 * Spread of repeat counts. Conventions as in Lotter & Lemcke 1999, Ojala et al. 2012 and Zolitschka et al. 2015 (from
 * memory). `best`: the count taken as the chronology; null: the mean.
 */
export function repeatCountError(counts: readonly number[], best: number | null = null): RepeatCountError {
  if (counts.length === 0)
    throw new Fault('argument', 'counts', 0, 'counts must hold at least one count; there is none')
  counts.forEach((count, k) => checkAtLeast(`counts[${k}]`, count, 0))
  const k = counts.length
  const mean = counts.reduce((sum, count) => sum + count, 0) / k
  const squares = counts.reduce((sum, count) => sum + (count - mean) ** 2, 0)
  const sorted = counts.toSorted((a, b) => a - b)
  const [min, max] = [sorted[0], sorted[k - 1]]
  const repeated = k > 1
  const sd = repeated ? Math.sqrt(squares / (k - 1)) : null
  const rms = repeated ? Math.sqrt(squares / k) : null
  const se = sd === null ? null : sd / Math.sqrt(k)
  const percentOfMean = (value: number | null) => (value === null || mean === 0 ? null : (100 * value) / mean)
  const centre = best === null ? mean : checkFinite('best count', best)
  return {
    counts: [...counts],
    mean,
    median: (sorted[(k - 1) >> 1] + sorted[k >> 1]) / 2,
    min,
    max,
    range: max - min,
    halfRange: (max - min) / 2,
    sd,
    rms,
    se,
    halfWidth95: se === null ? null : studentQuantile(0.975, k - 1) * se,
    percent: {
      sd: percentOfMean(sd),
      rms: percentOfMean(rms),
      se: percentOfMean(se),
      halfRange: percentOfMean((max - min) / 2) ?? 0,
    },
    asymmetric: {
      best: centre,
      plus: max - centre,
      minus: centre - min,
      percentPlus: centre === 0 ? 0 : (100 * (max - centre)) / centre,
      percentMinus: centre === 0 ? 0 : (100 * (centre - min)) / centre,
    },
  }
}

/** A count by the half-layer rule. The two readings of its error are kept apart: they differ tenfold downcore. */
export interface HalfLayerError {
  /** Certain layers plus half of the doubtful ones. */
  years: number
  /** Maximum counting error: half of the doubtful layers, summed linearly down the core. */
  mce: number
  /** One standard deviation if the maximum counting error is read as two of them. */
  sigma: number
  /** Standard deviation if every doubtful layer were an independent fair coin: sqrt(n / 4). Not the published rule. */
  independentSd: number
}

/**
 * N = n_certain + n_doubtful / 2, MCE = n_doubtful / 2, linear (Rasmussen et al. 2006, JGR 111, D06102); "in a
 * standard-deviation sense" the MCE is 2 sigma (Andersen et al. 2006, QSR 25, 3246).
 */
export function halfLayerError(certainLayers: number, doubtfulLayers: number): HalfLayerError {
  checkAtLeast('certain layers', certainLayers, 0)
  checkAtLeast('doubtful layers', doubtfulLayers, 0)
  const mce = doubtfulLayers / 2
  return { years: certainLayers + mce, mce, sigma: mce / 2, independentSd: Math.sqrt(doubtfulLayers / 4) }
}

/** Errors of sections between marker layers, added up in three ways; `percent` of all varves. */
export interface SectionError {
  varves: number
  linear: number
  independent: number
  correlated: number
  percent: { linear: number; independent: number; correlated: number }
  /** Root mean square of the sections' relative errors, percent. */
  rmsRelativePercent: number
}

/**
 * Sections with errors e_i on n_i varves: linear sum e (fully correlated), independent sqrt(sum e^2), and with a common
 * correlation rho: E^2 = sum e^2 + rho ((sum e)^2 - sum e^2).
 */
export function sectionError(errors: readonly number[], varves: readonly number[], rho: number): SectionError {
  checkSameLength('varves', varves, errors.length)
  checkWithin('rho', rho, 0, 1)
  errors.forEach((error, i) => checkAtLeast(`errors[${i}]`, error, 0))
  varves.forEach((n, i) => checkPositive(`varves[${i}]`, n))
  const linear = errors.reduce((sum, e) => sum + e, 0)
  const squares = errors.reduce((sum, e) => sum + e * e, 0)
  const total = varves.reduce((sum, n) => sum + n, 0)
  const independent = Math.sqrt(squares)
  const correlated = Math.sqrt(squares + rho * (linear * linear - squares))
  const relative = errors.reduce((sum, e, i) => sum + (e / varves[i]) ** 2, 0) / errors.length
  const percent = (value: number) => (100 * value) / total
  return {
    varves: total,
    linear,
    independent,
    correlated,
    percent: { linear: percent(linear), independent: percent(independent), correlated: percent(correlated) },
    rmsRelativePercent: 100 * Math.sqrt(relative),
  }
}

/** Expected years and their spread by quality classes: E = sum n p, Var = sum n p (1 - p), layers independent. */
export function qualityClassError(classes: readonly { layers: number; probability: number }[]): {
  years: number
  variance: number
  sd: number
} {
  let years = 0
  let variance = 0
  for (const [i, { layers, probability }] of classes.entries()) {
    checkAtLeast(`classes[${i}].layers`, layers, 0)
    checkWithin(`classes[${i}].probability`, probability, 0, 1)
    years += layers * probability
    variance += layers * probability * (1 - probability)
  }
  return { years, variance, sd: Math.sqrt(variance) }
}

/**
 * What a counter who misses each true year with probability u and doubles it with probability o is expected to count:
 * E = Y (1 - u + o), Var = Y [u + o - (o - u)^2].
 */
export function missDoubleCount(
  trueYears: number,
  miss: number,
  double: number,
): { count: number; variance: number; sd: number } {
  checkAtLeast('true years', trueYears, 0)
  checkMissDouble(miss, double)
  const variance = trueYears * (miss + double - (double - miss) ** 2)
  return { count: trueYears * (1 - miss + double), variance, sd: Math.sqrt(variance) }
}

/** A count corrected for known rates of missing and doubling: count / (1 + o - u). */
export function missDoubleCorrected(count: number, miss: number, double: number): number {
  checkAtLeast('count', count, 0)
  checkMissDouble(miss, double)
  return count / (1 + double - miss)
}

function checkMissDouble(miss: number, double: number): void {
  checkWithin('miss rate', miss, 0, 1)
  checkWithin('double rate', double, 0, 1)
  if (!(miss + double <= 1 && miss < 1)) {
    throw new Fault(
      'argument',
      'miss rate',
      miss,
      `miss rate and double rate must not exceed 1 together; they are ${miss} and ${double}`,
    )
  }
}
