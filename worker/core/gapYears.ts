/** Years that passed where none can be counted: unreadable spans and hiatuses between the boundaries of one count. */
import { checkAtLeast, Fault } from '../check.ts'
import type { Span } from './spans.ts'
import { renewalYears, type YearsInside } from './unreadableYears.ts'

/** A span, and for a hiatus the fewest and most years lost in it, if anything is known of them. */
export interface DatedSpan extends Span {
  years?: [number, number] | null
}

/** Years to be added after boundary i, by kind of span; and the first boundary below a hiatus of unknown length. */
export interface GapYears {
  unreadable: Map<number, YearsInside>
  hiatus: Map<number, YearsInside>
  openFrom: number | null
}

/** As many layers on either side of an unreadable stretch speak for its thickness (our own figure). */
const neighbours = 25
/** With fewer layers than this on a side, the two sides are not told apart. */
const leastOnSide = 5

/**
 * Unreadable spans: N = gap / mean thickness of the neighbours, with the variance of the renewal theorem and of the mean
 * (renewalYears); where the means above and below differ, the span may be like the one or the other, and the variance of an
 * even distribution between the two estimates is added. The gap is all from the last boundary above to the first below,
 * without event beds, so the year that one more boundary would make anyway is taken off.
 */
export function gapYears(position: Float64Array, spans: readonly DatedSpan[]): GapYears {
  const thickness = thicknesses(position, spans)
  const result: GapYears = { unreadable: new Map(), hiatus: new Map(), openFrom: null }
  const within = (kind: Span['kind'], i: number) =>
    spans.filter((span) => span.kind === kind && span.from < position[i + 1] && span.to > position[i])
  for (let i = 0; i + 1 < position.length; i++) {
    // A thickness is known wherever neither kind of gap lies between the two boundaries.
    if (!Number.isNaN(thickness[i])) continue
    for (const { years } of within('hiatus', i)) {
      if (years) result.hiatus.set(i, sumOf(result.hiatus.get(i), hiatusYears(years)))
      else result.openFrom ??= i + 1
    }
    if (within('unreadable', i).length === 0) continue
    const room = position[i + 1] - position[i] - eventLength(spans, position[i], position[i + 1])
    const inside = yearsIn(room, near(thickness, i, -1), near(thickness, i, 1), i)
    result.unreadable.set(i, { mean: Math.max(0, inside.mean - 1), variance: inside.variance })
  }
  return result
}

function sumOf(a: YearsInside | undefined, b: YearsInside): YearsInside {
  return { mean: (a?.mean ?? 0) + b.mean, variance: (a?.variance ?? 0) + b.variance }
}

/** Every year of the range as likely as another: an even distribution over whole numbers has the variance (n^2 - 1) / 12. */
function hiatusYears([least, most]: [number, number]): YearsInside {
  checkAtLeast('fewest years of a hiatus', least, 0)
  checkAtLeast('most years of a hiatus', most, least)
  return { mean: (least + most) / 2, variance: ((most - least + 1) ** 2 - 1) / 12 }
}

function yearsIn(room: number, above: readonly number[], below: readonly number[], i: number): YearsInside {
  const all = [...above, ...below]
  if (all.length < 2) {
    const message = `the unreadable span below boundary ${i + 1} has ${all.length} readable layers around it; at least 2 are needed to say how many years it holds`
    throw new Fault('argument', 'spans', all.length, message)
  }
  const mean = meanOf(all)
  const sd = Math.sqrt(all.reduce((sum, one) => sum + (one - mean) ** 2, 0) / (all.length - 1))
  const years = renewalYears(room, mean, sd, all.length)
  if (above.length < leastOnSide || below.length < leastOnSide) return years
  const ends = room / meanOf(above) - room / meanOf(below)
  return { mean: years.mean, variance: years.variance + (ends * ends) / 12 }
}

const meanOf = (values: readonly number[]) => values.reduce((sum, one) => sum + one, 0) / values.length

/** Thickness below each boundary without event beds, path pixels; NaN for the last and where it cannot be read. */
export function thicknesses(position: Float64Array, spans: readonly Span[]): Float64Array {
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

/** The nearest thicknesses that can be read, on one side of row i. */
function near(thickness: Float64Array, i: number, direction: 1 | -1): number[] {
  const found: number[] = []
  for (let at = i + direction; at >= 0 && at < thickness.length && found.length < neighbours; at += direction) {
    if (thickness[at] > 0) found.push(thickness[at])
  }
  return found
}
