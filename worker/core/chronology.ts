import { checkAtLeast, checkFinite, checkSameLength, Fault } from '../check.ts'
import { repeatCountError } from './countingError.ts'
import type { Span } from './spans.ts'
import { renewalYears } from './unreadableYears.ts'

/** One count's boundaries that count, sorted downcore; both columns [boundaries]. */
export interface CountedBoundaries {
  /** Path pixels. */
  position: Float64Array
  /** 1 where the counter was in doubt. */
  doubtful: Uint8Array
}

export const errorConventions = ['half-layer', 'repeat-counts'] as const
export type ErrorConvention = (typeof errorConventions)[number]

export interface ChronologyRequest {
  /** The count the chronology is built on. */
  count: CountedBoundaries
  /** All counts of this transect, the one above among them; two or more are needed for `repeat-counts`. */
  repeats: CountedBoundaries[]
  spans: Span[]
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
  /** Years put in for unreadable spans, with their SD. */
  unreadable: { years: number; sd: number }
}

/** As many layers on either side of an unreadable stretch speak for its thickness (our own figure). */
const neighbours = 25
/** Two-sided 95 % point of the normal distribution. */
const normal95 = 1.959963984540054

/**
 * From one count to years with an error that grows downcore.
 *
 * `half-layer`: a doubtful layer is 1/2 year; the maximum counting error is half of them, summed linearly, and read as 2
 * sigma (Rasmussen et al. 2006, JGR 111, D06102; Andersen et al. 2006, QSR 25, 3246).
 * `repeat-counts`: the mean of the counts' cumulative totals at each depth, with their SD (n - 1) and the 95 % half-width of
 * the mean, t SD / sqrt(n) (Student). Neither sees what all counters miss alike.
 * Unreadable stretches hold the years that the layers around them suggest (renewal theorem; Cox 1962), independent of the
 * counting and added in quadrature; event beds hold none; a hiatus is of unknown length and adds none.
 */
export function buildChronology(request: ChronologyRequest): Chronology {
  checkRequest(request)
  const { count, spans, mmPerPx, depthTop, convention, anchorYear } = request
  const gaps = unreadableGaps(count.position, spans)
  const counted = convention === 'half-layer' ? halfLayers(count) : meanOfCounts(request)
  const n = count.position.length
  const varveYear = new Float64Array(n)
  const sigma = new Float64Array(n)
  const half95 = new Float64Array(n)
  let years = 0
  let variance = 0
  for (let i = 0; i < n; i++) {
    varveYear[i] = counted.years[i] + years
    sigma[i] = Math.hypot(counted.sigma[i], Math.sqrt(variance))
    half95[i] = Math.hypot(counted.half95[i], normal95 * Math.sqrt(variance))
    const gap = gaps.get(i)
    if (!gap) continue
    years += gap.mean
    variance += gap.variance
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
    unreadable: { years, sd: Math.sqrt(variance) },
  }
}

function checkRequest({ count, repeats, convention, mmPerPx, depthTop, anchorYear }: ChronologyRequest): void {
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

/** Extra years after boundary i where an unreadable span lies between it and the next; the year it would be anyway is not counted twice. */
function unreadableGaps(
  position: Float64Array,
  spans: readonly Span[],
): Map<number, { mean: number; variance: number }> {
  const unreadable = spans.filter(({ kind }) => kind === 'unreadable')
  const gaps = new Map<number, { mean: number; variance: number }>()
  if (unreadable.length === 0) return gaps
  const thickness = thicknesses(position, spans)
  for (let i = 0; i + 1 < position.length; i++) {
    if (!unreadable.some(({ from, to }) => from < position[i + 1] && to > position[i])) continue
    const near = nearestThicknesses(thickness, i)
    if (near.length < 2) {
      throw new Fault(
        'argument',
        'spans',
        near.length,
        `the unreadable span below boundary ${i + 1} has ${near.length} readable layers around it; at least 2 are needed to say how many years it holds`,
      )
    }
    const mean = near.reduce((sum, one) => sum + one, 0) / near.length
    const sd = Math.sqrt(near.reduce((sum, one) => sum + (one - mean) ** 2, 0) / (near.length - 1))
    const room = position[i + 1] - position[i] - eventLength(spans, position[i], position[i + 1])
    const inside = renewalYears(room, mean, sd, near.length)
    gaps.set(i, { mean: Math.max(0, inside.mean - 1), variance: inside.variance })
  }
  return gaps
}

/** Thickness below each boundary without event beds, path pixels; NaN for the last and where it cannot be read. */
function thicknesses(position: Float64Array, spans: readonly Span[]): Float64Array {
  const breaks = spans.filter(({ kind }) => kind !== 'event')
  return position.map((from, i) => {
    const to = position[i + 1] as number | undefined
    if (to === undefined || breaks.some((span) => span.from < to && span.to > from)) return NaN
    return to - from - eventLength(spans, from, to)
  })
}

function eventLength(spans: readonly Span[], from: number, to: number): number {
  let sum = 0
  for (const span of spans) {
    if (span.kind === 'event') sum += Math.max(0, Math.min(to, span.to) - Math.max(from, span.from))
  }
  return sum
}

function nearestThicknesses(thickness: Float64Array, row: number): number[] {
  const found: number[] = []
  for (const direction of [-1, 1]) {
    let taken = 0
    for (let i = row + direction; i >= 0 && i < thickness.length && taken < neighbours; i += direction) {
      if (!(thickness[i] > 0)) continue
      found.push(thickness[i])
      taken++
    }
  }
  return found
}
