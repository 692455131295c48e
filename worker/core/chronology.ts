import { checkAtLeast, checkFinite, checkSameLength, checkWithin, Fault } from '../check.ts'
import { repeatCountError } from './countingError.ts'
import { gapYears, thicknesses, type DatedSpan } from './gapYears.ts'

export type { DatedSpan } from './gapYears.ts'

/** One count's boundaries that count, sorted downcore; both columns [boundaries]. */
export interface CountedBoundaries {
  /** Path pixels. */
  position: Float64Array
  /** 1 where the counter was in doubt. */
  doubtful: Uint8Array
}

export const errorConventions = ['half-layer', 'half-layer-independent', 'repeat-counts', 'sites'] as const
export type ErrorConvention = (typeof errorConventions)[number]

/** Years downcore that come with an error of their own: from the counter model, or from a ladder; columns [sites], sorted downcore. */
export interface SiteYears {
  /** Path pixels. */
  position: Float64Array
  /** Expected years from the first site down to and with each site, and their SD. */
  yearsTo: Float64Array
  sdTo: Float64Array
}

export interface ChronologyRequest {
  /** The count the chronology is built on. */
  count: CountedBoundaries
  /** All counts of this transect, the one above among them; two or more are needed for `repeat-counts`. */
  repeats: CountedBoundaries[]
  /** Needed for the convention `sites`: see SiteYears. */
  sites?: SiteYears | null
  /** SD of the bias that all counters share, as a fraction of the years; default 0. Told as a term of its own. */
  systematicSd?: number
  spans: DatedSpan[]
  /** mm per path pixel; null: depth and thickness stay unknown (NaN). */
  mmPerPx: number | null
  /** Depth of path distance 0 below the sediment surface, mm. */
  depthTop: number
  convention: ErrorConvention
  /** Calendar year (astronomical) of the youngest counted varve; null: floating. */
  anchorYear: number | null
}

/** Years at every boundary of the count; columns [boundaries]. The varve of a boundary is the one below it. */
export interface Chronology {
  /** Path pixels. */
  position: Float64Array
  depthMm: Float64Array
  /** From this boundary to the next without event beds, mm; NaN for the last, and where an unreadable span or hiatus lies between. */
  thicknessMm: Float64Array
  /** Number of the varve from the top of the count, 1 the youngest. */
  varveYear: Float64Array
  /** Standard deviation of varveYear in years, unreadable spans included. */
  sigma: Float64Array
  /** Half width of the 95 % interval in years. */
  half95: Float64Array
  /** Astronomical year; null for a floating chronology. */
  calendarYear: Float64Array | null
  convention: ErrorConvention
  /** Standard deviation from the bias that all counters share, years, [boundaries]: in none of the errors above. */
  systematic: Float64Array
  /** Years put in for unreadable spans, with their SD. */
  unreadable: { years: number; sd: number }
  /** Years put in for hiatuses of known range, with their SD. */
  hiatus: { years: number; sd: number }
  /** First boundary below a hiatus of unknown length: from there on the years are the fewest there can be. Null: none. */
  openFrom: number | null
}

/** Two-sided 95 % point of the normal distribution. */
const normal95 = 1.959963984540054

/**
 * From one count to years with an error that grows downcore.
 *
 * `half-layer`: a doubtful layer is 1/2 year; the maximum counting error is half of them, summed linearly, and read as 2
 * sigma (Rasmussen et al. 2006, JGR 111, D06102; Andersen et al. 2006, QSR 25, 3246).
 * `repeat-counts`: the mean of the counts' cumulative totals at each depth, with their SD (n - 1) and the 95 % half-width of
 * the mean, t SD / sqrt(n) (Student). Neither sees what all counters miss alike.
 * `half-layer-independent`: every doubtful layer an independent fair coin, sqrt(n / 4); not the published rule.
 * `sites`: expected years and SD of aligned sites or of a ladder, at the site nearest to each boundary.
 * Unreadable stretches hold the years that the layers around them suggest (see gapYears.ts), independent of the counting and
 * added in quadrature; event beds hold none; a hiatus holds the years of its range, each as likely as another, or adds none
 * and leaves the count below open.
 */
export function buildChronology(request: ChronologyRequest): Chronology {
  checkRequest(request)
  const { count, spans, mmPerPx, depthTop, convention, anchorYear } = request
  const gaps = gapYears(count.position, spans)
  const counted = countedYears(request)
  const n = count.position.length
  const varveYear = new Float64Array(n)
  const sigma = new Float64Array(n)
  const half95 = new Float64Array(n)
  const added = { unreadable: { years: 0, variance: 0 }, hiatus: { years: 0, variance: 0 } }
  for (let i = 0; i < n; i++) {
    const variance = added.unreadable.variance + added.hiatus.variance
    varveYear[i] = counted.years[i] + added.unreadable.years + added.hiatus.years
    sigma[i] = Math.hypot(counted.sigma[i], Math.sqrt(variance))
    half95[i] = Math.hypot(counted.half95[i], normal95 * Math.sqrt(variance))
    for (const kind of ['unreadable', 'hiatus'] as const) {
      added[kind].years += gaps[kind].get(i)?.mean ?? 0
      added[kind].variance += gaps[kind].get(i)?.variance ?? 0
    }
  }
  const mm = mmPerPx ?? NaN
  return {
    position: count.position.slice(),
    depthMm: count.position.map((position) => depthTop + position * mm),
    thicknessMm: thicknesses(count.position, spans).map((thickness) => thickness * mm),
    varveYear,
    sigma,
    half95,
    calendarYear: anchorYear === null ? null : varveYear.map((year) => anchorYear - (year - 1)),
    convention,
    systematic: varveYear.map((year) => (request.systematicSd ?? 0) * year),
    unreadable: { years: added.unreadable.years, sd: Math.sqrt(added.unreadable.variance) },
    hiatus: { years: added.hiatus.years, sd: Math.sqrt(added.hiatus.variance) },
    openFrom: gaps.openFrom,
  }
}

function countedYears(request: ChronologyRequest): CountedYears {
  switch (request.convention) {
    case 'half-layer':
      return halfLayers(request.count)
    case 'half-layer-independent':
      return independentHalves(request.count)
    case 'repeat-counts':
      return meanOfCounts(request)
    case 'sites':
      return yearsOfSites(request.count.position, request.sites ?? null)
  }
}

function checkRequest(request: ChronologyRequest): void {
  const { count, repeats, convention, mmPerPx, depthTop, anchorYear } = request
  for (const { position, doubtful } of [count, ...repeats]) {
    checkSameLength('doubtful', doubtful, position.length)
    for (let i = 0; i < position.length; i++) {
      checkFinite(`position of boundary ${i + 1}`, position[i])
      if (i > 0 && !(position[i] > position[i - 1])) {
        throw new Fault(
          'argument',
          'position',
          position[i],
          `boundaries must be sorted downcore; boundary ${i + 1} is not below boundary ${i}`,
        )
      }
    }
  }
  if (convention === 'repeat-counts' && repeats.length < 2) {
    throw new Fault(
      'argument',
      'repeats',
      repeats.length,
      `an error from repeat counts needs at least 2 counts; there is ${repeats.length}`,
    )
  }
  if (mmPerPx !== null) checkAtLeast('mm per pixel', mmPerPx, Number.MIN_VALUE)
  checkFinite('depth of the top', depthTop)
  checkWithin('systematic SD', request.systematicSd ?? 0, 0, 1)
  if (anchorYear !== null) checkFinite('anchor year', anchorYear)
}

interface CountedYears {
  years: Float64Array
  sigma: Float64Array
  half95: Float64Array
}

function halfLayers({ position, doubtful }: CountedBoundaries): CountedYears {
  const years = new Float64Array(position.length)
  const half95 = new Float64Array(position.length)
  let certain = 0
  let inDoubt = 0
  for (let i = 0; i < position.length; i++) {
    if (doubtful[i]) inDoubt++
    else certain++
    years[i] = certain + inDoubt / 2
    half95[i] = inDoubt / 2
  }
  return { years, sigma: half95.map((maximum) => maximum / 2), half95 }
}

/** As halfLayers, but the doubtful layers independent of each other: E = sum p, Var = sum p (1 - p) with p = 1/2. */
function independentHalves(count: CountedBoundaries): CountedYears {
  const { years, half95: mce } = halfLayers(count)
  const sigma = mce.map((maximum) => Math.sqrt(maximum / 2))
  return { years, sigma, half95: sigma.map((sd) => normal95 * sd) }
}

/** Years of layers that are real with the given probabilities, independently: E = sum p, Var = sum p (1 - p). */
export function independentLayers(position: Float64Array, probability: Float64Array): SiteYears {
  checkSameLength('probability', probability, position.length)
  let years = 0
  let variance = 0
  const yearsTo = new Float64Array(position.length)
  const sdTo = new Float64Array(position.length)
  for (let i = 0; i < position.length; i++) {
    const p = checkWithin(`probability of layer ${i + 1}`, probability[i], 0, 1)
    yearsTo[i] = years += p
    variance += p * (1 - p)
    sdTo[i] = Math.sqrt(variance)
  }
  return { position, yearsTo, sdTo }
}

function yearsOfSites(boundaries: Float64Array, sites: SiteYears | null): CountedYears {
  if (!sites || sites.position.length === 0) {
    throw new Fault('argument', 'sites', null, 'an error from aligned sites needs the sites: compare the counts first')
  }
  const { position, yearsTo, sdTo } = sites
  checkSameLength('years of the sites', yearsTo, position.length)
  checkSameLength('SD of the sites', sdTo, position.length)
  let site = 0
  const nearest = Array.from(boundaries, (at) => {
    while (site + 1 < position.length && Math.abs(position[site + 1] - at) <= Math.abs(position[site] - at)) site++
    return site
  })
  const sigma = Float64Array.from(nearest, (one) => sdTo[one])
  return { years: Float64Array.from(nearest, (one) => yearsTo[one]), sigma, half95: sigma.map((sd) => normal95 * sd) }
}

function meanOfCounts({ count, repeats }: ChronologyRequest): CountedYears {
  const n = count.position.length
  const result = { years: new Float64Array(n), sigma: new Float64Array(n), half95: new Float64Array(n) }
  const cumulative = repeats.map((one) => cumulativeYears(one, count.position))
  for (let i = 0; i < n; i++) {
    const error = repeatCountError(cumulative.map((years) => years[i]))
    result.years[i] = error.mean
    result.sigma[i] = error.sd ?? 0
    result.half95[i] = error.halfWidth95 ?? 0
  }
  return result
}

/**
 * A count's years down to each depth, straight between its boundaries, so that two counters who put the same boundary a
 * pixel apart do not differ by a year; [depths]. Doubtful boundaries count one half.
 */
export function cumulativeYears({ position, doubtful }: CountedBoundaries, depths: Float64Array): Float64Array {
  const result = new Float64Array(depths.length)
  let above = 0
  let k = 0
  for (let i = 0; i < depths.length; i++) {
    while (k < position.length && position[k] <= depths[i]) above += doubtful[k++] ? 0.5 : 1
    const next = k < position.length ? position[k] : NaN
    const from = k > 0 ? position[k - 1] : 0
    const share = next > from ? (depths[i] - from) / (next - from) : 0
    result[i] = above + (k < position.length && k > 0 ? share * (doubtful[k] ? 0.5 : 1) : 0)
  }
  return result
}
