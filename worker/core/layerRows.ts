import { siteKinds, type Ladder } from './ladder.ts'
import type { Span } from './spans.ts'

/** What a row of a table of layers stands for: a year seen, a year that passed unseen in unreadable ground, or a bed that took no time. */
export type LayerKind = 'varve' | 'unreadable' | 'event'

/** One layer, listed from the top of the path downcore; NaN where a value is not known. */
export interface LayerRow {
  /** Young edge: distance along the path from its first point, path pixels. */
  from: number
  /** From young edge to old edge along the path, without event beds, path pixels; NaN when an edge was not seen. */
  thickness: number
  probability: number
  kind: LayerKind
}

/** A boundary with the probability that it is one. */
export interface YearBoundary {
  position: number
  probability: number
  /** Placed in unreadable ground by the neighbouring thickness, not seen. */
  unseen: boolean
}

/** The boundaries of the most probable ladder. */
export function chosenBoundaries(ladder: Ladder): YearBoundary[] {
  const unreadable = siteKinds.indexOf('unreadable')
  const chosen: YearBoundary[] = []
  for (let i = 0; i < ladder.position.length; i++) {
    if (ladder.chosen[i] !== 1) continue
    const unseen = ladder.kind[i] === unreadable
    chosen.push({ position: ladder.position[i], probability: ladder.probability[i], unseen })
  }
  return chosen
}

/**
 * Lists boundaries and event beds as layers, downcore. Every boundary is the young edge of one year's layer, so there
 * are as many years as boundaries: what lies above the first boundary is a couplet that the path cuts, and is not listed;
 * the layer below the last boundary is cut by the path's end, and its thickness is left open.
 */
export function layerRows(boundaries: readonly YearBoundary[], spans: readonly Span[]): LayerRow[] {
  const events = spans.filter(({ kind }) => kind === 'event')
  const breaks = spans.filter(({ kind }) => kind === 'hiatus')
  const rows = boundaries.map(({ position, probability, unseen }, i): LayerRow => {
    const next = i + 1 < boundaries.length ? boundaries[i + 1] : null
    const broken = next && breaks.some(({ from, to }) => from < next.position && to > position)
    const seen = next && !unseen && !next.unseen && !broken
    const thickness = seen ? next.position - position - overlap(events, position, next.position) : NaN
    return { from: position, thickness, probability, kind: unseen ? 'unreadable' : 'varve' }
  })
  for (const { from, to } of events) rows.push({ from, thickness: to - from, probability: 1, kind: 'event' })
  return rows.sort((a, b) => a.from - b.from)
}

function overlap(spans: readonly Span[], from: number, to: number): number {
  let sum = 0
  for (const span of spans) sum += Math.max(0, Math.min(to, span.to) - Math.max(from, span.from))
  return sum
}
