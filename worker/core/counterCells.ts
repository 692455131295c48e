/**
 * Aligned sites sorted into cells: all sites of one quality class, seen by the same counters, equally crowded, with the
 * same labels, are alike to the model, so that a core of 20,000 years is no more work than one of 500.
 */
import { absent, unseen, type Alignment } from './alignment.ts'
import { checkSameLength, Fault } from '../check.ts'

/** How well a stretch can be read, as the counter judged it. */
export const qualityClasses = ['clear', 'fair', 'poor'] as const
export type QualityClass = (typeof qualityClasses)[number]

/** Sites of one quality class seen by the same counters. */
export interface CellGroup {
  /** Index into qualityClasses. */
  quality: number
  /** 1 for each counter that looked there, [counters]. */
  seenBy: Uint8Array
  /** Mean number of boundaries that a counter set there: as many places are taken to have offered a false one. */
  places: number
}

export interface Cell {
  group: number
  bin: number
  /** Index into siteLabels, [counters]. */
  label: Uint8Array
  sites: number
}

export interface CounterCells {
  counters: number
  groups: CellGroup[]
  bins: number
  /** Mean of the standardised log spacing in each bin, [bins]: low where layers are thin. */
  spacing: Float64Array
  cells: Cell[]
  /** Cell of each site, [sites]. */
  cellOfSite: Int32Array
}

const mostBins = 4
/** A bin must hold this many sites marked by most counters, or its rates could not be told from its neighbours'. */
const sitesPerBin = 50
/** Spacings outside these multiples of the local thickness say no more than the bound. */
const spacingBounds = [0.05, 5] as const

/** Sorts the sites. `quality`: index into qualityClasses, [sites]; null: all clear. */
export function cellsOf(alignment: Alignment, quality: Uint8Array | null): CounterCells {
  const counters = alignment.counters.length
  const sites = alignment.position.length
  if (quality) checkSameLength('quality', quality, sites)
  const spacing = logSpacing(alignment)
  const { edges, centre } = spacingBins(spacing, agreedSites(alignment))
  const groups = new Map<string, CellGroup & { index: number }>()
  const cells = new Map<string, Cell & { index: number }>()
  const cellOfSite = new Int32Array(sites)
  for (let s = 0; s < sites; s++) {
    const label = alignment.label.slice(s * counters, (s + 1) * counters)
    const seenBy = label.map((one) => (one === unseen ? 0 : 1))
    const grade = quality ? quality[s] : 0
    if (!(grade < qualityClasses.length)) {
      throw new Fault(
        'argument',
        `quality[${s}]`,
        grade,
        `quality[${s}] must be an index into ${qualityClasses.join(', ')}; it is ${grade}`,
      )
    }
    const groupKey = `${grade}:${seenBy.join('')}`
    const group = groups.get(groupKey) ?? { quality: grade, seenBy, places: 0, index: groups.size }
    groups.set(groupKey, group)
    group.places +=
      label.reduce((sum, one) => sum + (one !== unseen && one !== absent ? 1 : 0), 0) / seenBy.reduce((a, b) => a + b)
    const bin = edges.filter((edge) => spacing[s] >= edge).length
    const key = `${group.index}:${bin}:${label.join('')}`
    const cell = cells.get(key) ?? { group: group.index, bin, label, sites: 0, index: cells.size }
    cells.set(key, cell)
    cell.sites++
    cellOfSite[s] = cell.index
  }
  const [groupList, cellList] = [[...groups.values()], [...cells.values()]]
  return { counters, groups: groupList, bins: centre.length, spacing: centre, cells: cellList, cellOfSite }
}

/** 1 for the sites that at least half of those who looked marked, [sites]. */
function agreedSites({ counters, position, label }: Alignment): Uint8Array {
  const k = counters.length
  return Uint8Array.from(position, (_, s) => {
    let marked = 0
    let looked = 0
    for (const one of label.subarray(s * k, (s + 1) * k)) {
      if (one !== unseen) looked++
      if (one !== unseen && one !== absent) marked++
    }
    return 2 * marked >= looked ? 1 : 0
  })
}

/**
 * Log of the smaller distance to the next agreed site above or below, in local thicknesses, [sites]. Thin layers are the
 * ones most often missed, and a false boundary stands closer to its neighbours than a true one.
 */
function logSpacing(alignment: Alignment): Float64Array {
  const { position, thickness } = alignment
  const agreed = agreedSites(alignment)
  const nearest = new Float64Array(position.length).fill(Infinity)
  let last = -Infinity
  for (let s = 0; s < position.length; s++) {
    nearest[s] = position[s] - last
    if (agreed[s]) last = position[s]
  }
  let next = Infinity
  for (let s = position.length - 1; s >= 0; s--) {
    nearest[s] = Math.min(nearest[s], next - position[s])
    if (agreed[s]) next = position[s]
  }
  const [low, high] = spacingBounds
  return nearest.map((distance, s) => Math.log(Math.min(high, Math.max(low, distance / thickness[s]))))
}

/** Bin edges at the quantiles of the agreed sites' spacing, and each bin's mean in standard deviations from the mean of all. */
function spacingBins(spacing: Float64Array, agreed: Uint8Array): { edges: number[]; centre: Float64Array } {
  const sorted = spacing.filter((_, s) => agreed[s] === 1).sort()
  const n = sorted.length
  const bins = Math.max(1, Math.min(mostBins, Math.floor(n / sitesPerBin)))
  const mean = sorted.reduce((sum, x) => sum + x, 0) / Math.max(1, n)
  const sd = Math.sqrt(sorted.reduce((sum, x) => sum + (x - mean) ** 2, 0) / Math.max(1, n))
  if (bins === 1 || !(sd > 0)) return { edges: [], centre: new Float64Array(1) }
  const at = (bin: number) => Math.floor((n * bin) / bins)
  const edges = Array.from({ length: bins - 1 }, (_, b) => sorted[at(b + 1)])
  const centre = Float64Array.from({ length: bins }, (_, b) => {
    const part = sorted.subarray(at(b), at(b + 1))
    return (part.reduce((sum, x) => sum + x, 0) / part.length - mean) / sd
  })
  return { edges, centre }
}
