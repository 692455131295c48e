import { checkFinite, checkPositive } from '../check.ts'
import { layerRowKinds } from './countedLayers.ts'
import type { CountedLayers } from './countedLayers.ts'
import { layerRows } from './layerRows.ts'
import type { Span } from './spans.ts'

/** A count along a transect, as the ages need it. */
export interface CountOfSection {
  /** Boundaries that count, path pixels, sorted downcore. */
  position: Float64Array
  /** Probability of each to be a year: 1 where certain, one half where doubtful, or what repeat counts say. */
  probability: Float64Array
  spans: readonly Span[]
  /** mm per path pixel. */
  mmPerPx: number
  /** Depth of path distance 0 below the sediment surface, mm. */
  depthTop: number
}

/** The layers of a count as the lattice takes them: one row a year, with event beds, unreadable stretches and hiatuses between. */
export function layersOfCount({ position, probability, spans, mmPerPx, depthTop }: CountOfSection): CountedLayers {
  checkPositive('mm per pixel', mmPerPx)
  checkFinite('depth of the top', depthTop)
  const boundaries = Array.from(position, (place, i) => ({
    position: place,
    probability: probability[i],
    unseen: false,
  }))
  const unreadable = spans.filter(({ kind }) => kind === 'unreadable')
  const nextOf = new Map(
    Array.from(position, (place, i) => [place, i + 1 < position.length ? position[i + 1] : Infinity]),
  )
  const rows = layerRows(boundaries, spans).map((row) => {
    const end = nextOf.get(row.from) ?? row.from
    const cut = row.kind === 'varve' && unreadable.some(({ from, to }) => from < end && to > row.from)
    return { ...row, thickness: cut ? NaN : row.thickness, kind: layerRowKinds.indexOf(row.kind) }
  })
  for (const { from, to, kind } of spans) {
    if (kind === 'event') continue
    const thickness = kind === 'unreadable' ? to - from : NaN
    rows.push({ from, thickness, probability: 1, kind: layerRowKinds.indexOf(kind) })
  }
  rows.sort((a, b) => a.from - b.from)
  return {
    depth: Float64Array.from(rows, ({ from }) => depthTop + from * mmPerPx),
    thickness: Float64Array.from(rows, ({ thickness }) => thickness * mmPerPx),
    probability: Float64Array.from(rows, (row) => row.probability),
    kind: Uint8Array.from(rows, ({ kind }) => kind),
  }
}
