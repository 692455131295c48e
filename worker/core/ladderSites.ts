import type { Candidates } from './candidates.ts'
import { insideOf } from './ladderGround.ts'
import type { Ground, Range } from './ladderGround.ts'
import type { Stretch } from './semiMarkov.ts'
import type { ThicknessField } from './thicknessField.ts'

/** What stands at a site: a candidate, a confirmed boundary, or nothing but the chance of a year that left no mark. */
export type SiteKind = 'candidate' | 'confirmed' | 'missed' | 'unreadable'

/** The sites of one part of the core between hiatuses; columns [sites]. */
export interface SitePart {
  stretch: Stretch
  /** Path pixels. */
  position: Float64Array
  kind: SiteKind[]
  /** Index of the candidate, -1 for other kinds. */
  candidate: Int32Array
}

/** Distance of the sites that stand for unseen years, local medians: fine enough that their sum is the integral over depth. */
const hiddenStep = 0.125
/** A missed year keeps this distance from its neighbours; closer to them the neighbour's own candidate speaks. */
const hiddenMargin = 0.4
/** Candidates less likely than this, in log odds, are left out of the sums. */
const leastLogWeight = -14
/** A candidate closer to a confirmed boundary than this share of a layer is that boundary. */
const confirmedReach = 0.25

interface Site {
  position: number
  u: number
  kind: SiteKind
  candidate: number
  weight: number
}

/**
 * Lays out everything that may be a boundary. Candidates carry their evidence, confirmed boundaries are certain; between
 * them, where a layer is long enough to hide one, stand sites for a year that left no candidate, each with the odds
 * `missed` times the length it stands for. Unreadable ground is filled with such sites at full odds, so that years pass
 * there as the thickness law has it (renewal process). Candidates inside event beds and unreadable ground are dropped, and
 * so are confirmed boundaries inside event beds.
 */
export function laySites(
  candidates: Candidates,
  logWeight: Float64Array,
  ground: Ground,
  field: ThicknessField,
  confirmed: Float64Array,
  missed: number,
  expected: Float64Array,
): SitePart[] {
  const seen = seenSites(candidates, logWeight, ground, field, confirmed)
  return ground.parts.map(({ from, to }) => {
    const inPart = seen.filter(({ position }) => position >= from && position <= to)
    const hidden = [
      ...hiddenInGaps(inPart, ground, field, { from, to }, missed),
      ...hiddenInUnreadable(ground, field, { from, to }),
    ]
    const sites = [...inPart, ...hidden].sort((a, b) => a.u - b.u || a.position - b.position)
    return partOf(sites, expected, field.coordinate(from), field.coordinate(to))
  })
}

function seenSites(
  { position }: Candidates,
  logWeight: Float64Array,
  ground: Ground,
  field: ThicknessField,
  confirmed: Float64Array,
): Site[] {
  const sites: Site[] = []
  for (const at of confirmed) {
    if (insideOf(ground.events, at)) continue
    sites.push({ position: at, u: field.coordinate(at), kind: 'confirmed', candidate: -1, weight: 1 })
  }
  const certain = sites.length
  let next = 0
  for (let i = 0; i < position.length; i++) {
    const at = position[i]
    if (!(logWeight[i] > leastLogWeight) || insideOf(ground.events, at) || insideOf(ground.unreadable, at)) continue
    const u = field.coordinate(at)
    while (next < certain && sites[next].u < u - confirmedReach) next++
    let taken = false
    for (let k = next; k < certain && sites[k].u <= u + confirmedReach; k++) taken = true
    if (!taken) sites.push({ position: at, u, kind: 'candidate', candidate: i, weight: Math.exp(logWeight[i]) })
  }
  return sites.sort((a, b) => a.u - b.u || a.position - b.position)
}

/** Sites for years that left no candidate, between neighbouring seen sites far enough apart. */
function hiddenInGaps(seen: Site[], ground: Ground, field: ThicknessField, part: Range, missed: number): Site[] {
  const hidden: Site[] = []
  let before = field.coordinate(part.from) - hiddenMargin
  const end = field.coordinate(part.to)
  for (let k = 0; k <= seen.length; k++) {
    const after = k < seen.length ? seen[k].u : end + hiddenMargin
    const length = after - before - 2 * hiddenMargin
    if (length > 0) {
      const count = Math.max(1, Math.round(length / hiddenStep))
      const step = length / count
      for (let n = 0; n < count; n++) {
        const u = before + hiddenMargin + (n + 0.5) * step
        const position = field.positionOf(u)
        if (insideOf(ground.unreadable, position) || insideOf(ground.events, position)) continue
        hidden.push({ position, u, kind: 'missed', candidate: -1, weight: missed * step })
      }
    }
    before = after
  }
  return hidden
}

function hiddenInUnreadable(ground: Ground, field: ThicknessField, part: Range): Site[] {
  const hidden: Site[] = []
  for (const range of ground.unreadable) {
    const start = field.coordinate(Math.max(range.from, part.from))
    const length = field.coordinate(Math.min(range.to, part.to)) - start
    if (!(length > 0) || range.to <= part.from || range.from >= part.to) continue
    const count = Math.ceil(length / hiddenStep)
    for (let n = 0; n < count; n++) {
      const u = start + ((n + 0.5) * length) / count
      hidden.push({ position: field.positionOf(u), u, kind: 'unreadable', candidate: -1, weight: length / count })
    }
  }
  return hidden
}

function partOf(sites: Site[], expected: Float64Array, start: number, end: number): SitePart {
  return {
    stretch: {
      u: Float64Array.from(sites, ({ u }) => u),
      weight: Float64Array.from(sites, ({ weight }) => weight),
      forced: Uint8Array.from(sites, ({ kind }) => (kind === 'confirmed' ? 1 : 0)),
      shows: Uint8Array.from(sites, ({ kind }) => (kind === 'candidate' ? 1 : 0)),
      // Of a site without a candidate nothing is known of the layer above it.
      expected: Float64Array.from(sites, ({ candidate }) => (candidate < 0 ? 0 : expected[candidate])),
      start,
      end,
    },
    position: Float64Array.from(sites, ({ position }) => position),
    kind: sites.map(({ kind }) => kind),
    candidate: Int32Array.from(sites, ({ candidate }) => candidate),
  }
}
