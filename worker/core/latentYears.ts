/** What the counter model says, in the words of the report: rates with intervals, years with their 95 %, site by site and downcore. */
import type { Alignment } from './alignment.ts'
import { checkAtLeast, checkWithin } from '../check.ts'
import type { CounterCells } from './counterCells.ts'
import type { CounterDraws } from './counterModel.ts'
import type { CounterPriors } from './counterPriors.ts'
import { normalCdf } from './normal.ts'

/** Posterior mean and central 95 % interval. */
export interface Estimate {
  mean: number
  interval95: [number, number]
}

export interface LatentCounter {
  name: string
  /** Share of the years looked at that were missed. */
  missed: Estimate
  /** False marks per year looked at. */
  false: Estimate
}

export interface LatentYears {
  counters: LatentCounter[]
  expectedYears: number
  sdYears: number
  years95: [number, number]
  /** Years that no one marked; part of expectedYears. */
  missedByAll: Estimate
  /** The bias shared by all counters, which repeat counts cannot show: a term of its own, in none of the figures above. */
  systematic: {
    /** Standard deviation of the log of the factor between true and counted years. */
    sd: number
    /** 95 % interval of the years with both the counting error and the systematic term. */
    years95: [number, number]
  }
  /** Probability of each site to be a year, [sites]. */
  probability: Float64Array
  /** Expected years from the first site down to and with each site, those missed by all included, and their SD, [sites]. */
  yearsTo: Float64Array
  sdTo: Float64Array
  priors: CounterPriors
  /** What the figures rest on, in sentences for the page. */
  assumptions: string[]
}

/** The posterior of years between two sites; `from` and `to` are site indices, `to` excluded. */
export interface StretchYears {
  years: number
  sd: number
  years95: [number, number]
}

export function latentYears(
  alignment: Alignment,
  cells: CounterCells,
  draws: CounterDraws,
  priors: CounterPriors,
  systematicSd: number,
): LatentYears {
  checkWithin('systematic SD', systematicSd, 0, 1)
  const { mean, sd } = momentsOf(draws.years)
  const { yearsTo, sdTo } = downcore(cells, draws)
  const years95 = wholeNumberInterval(draws.years)
  return {
    counters: alignment.counters.map((name, k) => ({
      name,
      missed: estimateOf(draws.missed[k]),
      false: estimateOf(draws.false[k]),
    })),
    expectedYears: mean,
    sdYears: sd,
    years95,
    missedByAll: { mean: momentsOf(draws.missedByAll).mean, interval95: wholeNumberInterval(draws.missedByAll) },
    systematic: { sd: systematicSd, years95: systematicSd > 0 ? biasedInterval(draws.years, systematicSd) : years95 },
    probability: Float64Array.from(cells.cellOfSite, (cell) => draws.probability[cell]),
    yearsTo,
    sdTo,
    priors,
    assumptions: assumptionsOf(alignment.counters.length, systematicSd),
  }
}

function assumptionsOf(counters: number, systematicSd: number): string[] {
  const shared = `Not covered: layers that all counters take or leave alike. They are the systematic term (SD ${100 * systematicSd} %), shown apart.`
  const common = [
    'Given the truth, counters err independently; layers differ in clarity, and thin ones are missed more often.',
    'Every counted year offers one place for a false boundary.',
    shared,
  ]
  if (counters > 2) return common
  const fallback =
    "Two counters only: whether a single mark is one counter's false boundary or the other's missed year cannot be told from the marks; it is weighed by the stated priors and by how often doubtful marks stand alone. A third count would replace these assumptions."
  return [fallback, ...common]
}

export function momentsOf(values: Float64Array): { mean: number; sd: number } {
  const mean = values.reduce((sum, x) => sum + x, 0) / values.length
  return { mean, sd: Math.sqrt(values.reduce((sum, x) => sum + (x - mean) ** 2, 0) / values.length) }
}

function estimateOf(values: Float64Array): Estimate {
  const sorted = values.toSorted()
  const at = (p: number) => sorted[Math.min(sorted.length - 1, Math.floor(p * sorted.length))]
  return { mean: momentsOf(values).mean, interval95: [at(0.025), at(0.975)] }
}

/** A whole number with more than this left to its side, itself included, always belongs to the interval. */
const mostLeftOut = 0.05

/**
 * Central 95 % interval of whole numbers that holds the truth in 95 % of cores, not in 95 % or more as intervals that end
 * on whole numbers do. A number n at the rim has the tail T(n - 1) without it and T(n) with it; tails fall about
 * geometrically, so on average 2.5 % are left out if n is left out when the logarithmic mean of the two is below 2.5 % (the
 * arithmetic mean would give the mid-P rule of Lancaster 1961, JASA 56, 223, which leaves out too little where tails are
 * steep). The ends lie where that mean, drawn log-linearly between whole numbers, passes 2.5 %.
 */
export function wholeNumberInterval(draws: Float64Array): [number, number] {
  const low = lowerEnd(draws)
  return [low, -lowerEnd(draws.map((n) => -n))]
}

function lowerEnd(draws: Float64Array): number {
  const sorted = draws.toSorted()
  let before = NaN
  for (let end = 0, tail = 0; end < sorted.length;) {
    const n = sorted[end]
    const without = tail
    while (end < sorted.length && sorted[end] === n) end++
    tail = end / sorted.length
    const mean = logMean(Math.max(without, 0.5 / sorted.length), tail)
    if (mean >= 0.025 || tail > mostLeftOut) {
      // Between this number, the first inside, and the one above it in the row, the last outside.
      const share = Math.log(0.025 / before) / Math.log(Math.max(mean, 0.025) / before)
      return Number.isNaN(before) ? n - 0.5 : n - 1 + Math.min(1, share)
    }
    before = mean
  }
  return sorted[sorted.length - 1]
}

/** (b - a) / log(b / a). */
const logMean = (a: number, b: number) => (a === b ? a : (b - a) / Math.log(b / a))

/** 95 % interval of years times a log-normal factor of median 1, over all draws. */
function biasedInterval(draws: Float64Array, sd: number): [number, number] {
  const times = new Map<number, number>()
  for (const years of draws) times.set(years, (times.get(years) ?? 0) + 1)
  const logs = [...times].map(([years, n]) => ({ log: Math.log(Math.max(years, 0.5)), share: n / draws.length }))
  const below = (log: number) => logs.reduce((sum, one) => sum + one.share * normalCdf((log - one.log) / sd), 0)
  const all = logs.map(({ log }) => log)
  const [low, high] = [Math.min(...all) - 10 * sd, Math.max(...all) + 10 * sd]
  return [Math.exp(rootOf(below, 0.025, low, high)), Math.exp(rootOf(below, 0.975, low, high))]
}

/** Where a rising function passes a level, by bisection. */
function rootOf(rising: (x: number) => number, level: number, from: number, to: number): number {
  let [low, high] = [from, to]
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2
    if (rising(middle) < level) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/**
 * Years that one site stands for, in one draw: the year it may be, with probability p, and with each such year those that
 * no one marked, a geometric number with odds o = p0 / (1 - p0). Mean p (1 + o), variance p (1 + o)(1 + 2 o) - p^2 (1 + o)^2.
 */
function siteYears(draws: CounterDraws, at: number): { mean: number; variance: number } {
  const p = draws.keptProbability[at]
  const odds = draws.keptUnseenOdds[at]
  const mean = p * (1 + odds)
  return { mean, variance: mean * (1 + 2 * odds) - mean * mean }
}

/** Cumulative years and SD: the variance within each kept draw, and that of the draws' means, which is what is not known of the rates. */
function downcore(
  { cellOfSite, cells }: CounterCells,
  draws: CounterDraws,
): { yearsTo: Float64Array; sdTo: Float64Array } {
  const yearsTo = new Float64Array(cellOfSite.length)
  const squares = new Float64Array(cellOfSite.length)
  const within = new Float64Array(cellOfSite.length)
  for (let draw = 0; draw < draws.kept; draw++) {
    const perCell = cells.map((_, c) => siteYears(draws, draw * cells.length + c))
    let mean = 0
    let variance = 0
    for (let s = 0; s < cellOfSite.length; s++) {
      const site = perCell[cellOfSite[s]]
      mean += site.mean
      variance += site.variance
      yearsTo[s] += mean / draws.kept
      squares[s] += (mean - s) ** 2 / draws.kept
      within[s] += variance / draws.kept
    }
  }
  // Squares are taken around the site number, so that the difference of two large numbers is not needed.
  const sdTo = yearsTo.map((mean, s) => Math.sqrt(Math.max(0, within[s] + squares[s] - (mean - s) ** 2)))
  return { yearsTo, sdTo }
}

/**
 * Years between two sites, `from` and up to but without `to`, as a mixture of normals over the kept draws, none narrower
 * than a whole number is wide (variance 1/12).
 */
export function stretchYears(
  { cellOfSite, cells }: CounterCells,
  draws: CounterDraws,
  from: number,
  to: number,
): StretchYears {
  checkAtLeast('end of the stretch', to, from)
  const sitesIn = new Float64Array(cells.length)
  for (let s = from; s < to; s++) sitesIn[cellOfSite[s]]++
  const parts = Array.from({ length: draws.kept }, (_, draw) => {
    let mean = 0
    let variance = 0
    for (let c = 0; c < cells.length; c++) {
      if (sitesIn[c] === 0) continue
      const site = siteYears(draws, draw * cells.length + c)
      mean += sitesIn[c] * site.mean
      variance += sitesIn[c] * site.variance
    }
    return { mean, variance }
  })
  const years = parts.reduce((sum, { mean }) => sum + mean, 0) / parts.length
  const variance = parts.reduce((sum, part) => sum + part.variance + (part.mean - years) ** 2, 0) / parts.length
  const below = (x: number) =>
    parts.reduce((sum, part) => sum + normalCdf((x - part.mean) / Math.sqrt(Math.max(part.variance, 1 / 12))), 0) /
    parts.length
  const reach = 10 * Math.sqrt(variance + 1)
  const quantile = (p: number) => Math.max(0, rootOf(below, p, years - reach, years + reach))
  return { years, sd: Math.sqrt(variance), years95: [quantile(0.025), quantile(0.975)] }
}
