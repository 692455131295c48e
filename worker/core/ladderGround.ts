import { finiteRuns } from './runs.ts'
import type { Span } from './spans.ts'

/** Stretch of the path [from, to), path pixels. */
export interface Range {
  from: number
  to: number
}

/** What the path is made of: where no time passed, where nothing can be seen, where the record breaks. */
export interface Ground {
  rows: number
  /** Event spans: they hold no time, and their thickness belongs to no year. */
  events: Range[]
  /** Unreadable spans and gaps of the profile: years pass here unseen. */
  unreadable: Range[]
  /** Parts between hiatuses; across a hiatus nothing is known. */
  parts: Range[]
}

/** Gaps of the profile shorter than this share of a layer cannot hide a year's boundary from its neighbours. */
const shortGap = 0.3

/** Sorts spans and the gaps of the signal into ground; `signal` [rows] is NaN where the profile is unreadable. */
export function layGround(rows: number, spans: Span[], signal: Float64Array | null, typical: number): Ground {
  const events = spans.filter(({ kind }) => kind === 'event')
  const marked = spans.filter(({ kind }) => kind === 'unreadable')
  const gaps = signal === null ? [] : gapsOf(signal).filter(({ from, to }) => to - from > shortGap * typical)
  const hiatuses = spans.filter(({ kind }) => kind === 'hiatus')
  const parts: Range[] = []
  let from = 0
  for (const hiatus of hiatuses) {
    parts.push({ from, to: hiatus.from })
    from = hiatus.to
  }
  parts.push({ from, to: rows })
  return {
    rows,
    events,
    unreadable: without(
      merged([...marked, ...gaps]),
      [...events, ...hiatuses].sort((a, b) => a.from - b.from),
    ),
    parts,
  }
}

function gapsOf(signal: Float64Array): Range[] {
  const gaps: Range[] = []
  let at = 0
  for (const run of finiteRuns(signal)) {
    if (run.from > at) gaps.push({ from: at, to: run.from })
    at = run.to
  }
  if (at < signal.length) gaps.push({ from: at, to: signal.length })
  return gaps
}

function merged(ranges: Range[]): Range[] {
  const result: Range[] = []
  for (const { from, to } of [...ranges].sort((a, b) => a.from - b.from)) {
    const last = result.at(-1)
    if (last !== undefined && from <= last.to) last.to = Math.max(last.to, to)
    else result.push({ from, to })
  }
  return result
}

/** What is left of `ranges` outside `holes`; both sorted. */
function without(ranges: Range[], holes: Range[]): Range[] {
  const result: Range[] = []
  for (const { from, to } of ranges) {
    let at = from
    for (const hole of holes) {
      if (hole.to <= at || hole.from >= to) continue
      if (hole.from > at) result.push({ from: at, to: hole.from })
      at = Math.max(at, hole.to)
    }
    if (at < to) result.push({ from: at, to })
  }
  return result
}

/** Whether a position lies inside one of the sorted ranges, their edges left out. */
export function insideOf(ranges: Range[], position: number): boolean {
  let low = 0
  let high = ranges.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (ranges[middle].to > position) high = middle
    else low = middle + 1
  }
  return low < ranges.length && ranges[low].from < position
}
