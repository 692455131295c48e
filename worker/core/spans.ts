import { Fault, checkFinite, checkOneOf } from '../check.ts'

export const spanKinds = ['event', 'unreadable', 'hiatus'] as const

/**
 * A stretch of the path that holds no countable years of its own: `event` took no time, `unreadable` took unknown time,
 * a `hiatus` is a gap in deposition across which nothing is known.
 */
export interface Span {
  /** Path pixels. */
  from: number
  to: number
  kind: (typeof spanKinds)[number]
}

/** Spans sorted downcore, each checked: inside [0, rows], the right way round, none over another. */
export function checkedSpans(spans: readonly Span[], rows: number): Span[] {
  for (const [i, { from, to, kind }] of spans.entries()) {
    checkOneOf(`kind of span ${i + 1}`, kind, spanKinds)
    checkFinite(`start of span ${i + 1}`, from)
    checkFinite(`end of span ${i + 1}`, to)
    if (!(from >= 0 && to <= rows)) {
      fault(i, `lies outside the profile, which runs from 0 to ${rows} px; move or delete it`, from, to)
    }
    if (!(kind === 'hiatus' ? to >= from : to > from)) {
      fault(i, 'ends before it begins; swap its ends', from, to)
    }
  }
  const sorted = [...spans].sort((a, b) => a.from - b.from || a.to - b.to)
  for (let i = 1; i < sorted.length; i++) {
    if (sorted[i].from < sorted[i - 1].to) {
      const { from, to } = sorted[i]
      fault(
        spans.indexOf(sorted[i]),
        `overlaps the span before it, which ends at ${sorted[i - 1].to} px; shorten one of them`,
        from,
        to,
      )
    }
  }
  return sorted
}

function fault(i: number, what: string, from: number, to: number): never {
  throw new Fault('argument', `span ${i + 1}`, `${from}..${to}`, `span ${i + 1} (${from} to ${to} px) ${what}`)
}

/** Confirmed boundaries: inside the profile, sorted downcore, no two the same. */
export function checkedBoundaries(field: string, boundaries: Float64Array, rows: number): void {
  for (let i = 0; i < boundaries.length; i++) {
    const at = boundaries[i]
    if (!(at >= 0 && at <= rows)) {
      throw new Fault('argument', field, at, `${field} must lie between 0 and ${rows} px; number ${i + 1} is at ${at}`)
    }
    if (i > 0 && !(at > boundaries[i - 1])) {
      const message = `${field} must be sorted downcore without repeats; number ${i + 1} at ${at} px follows ${boundaries[i - 1]} px`
      throw new Fault('argument', field, at, message)
    }
  }
}
