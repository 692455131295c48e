/** How far counters agree, site by site. */
import { absent, certain, doubtful, unseen, type Alignment } from './alignment.ts'
import { captureRecapture, chaoLowerBound, type CaptureEstimate, type ChaoEstimate } from './captureRecapture.ts'
import { checkFinite } from '../check.ts'
import type { CounterMarks } from './counterMarks.ts'
import { halfLayerError, type HalfLayerError } from './countingError.ts'
import { cohenKappa, fleissKappa, type CohenKappa, type FleissKappa } from './kappa.ts'

/** Labels that a counter can give to what they looked at. */
const labelKinds = 3

export interface PairAgreement {
  /** Names, and places in the list of counters. */
  first: string
  second: string
  counters: [number, number]
  /** Sites that both looked at by label: rows the first counter, columns the second, [absent, doubtful, certain] each. */
  table: number[][]
  /** Unweighted, and weighted linearly so that certain against doubtful disagrees half. */
  kappa: CohenKappa
  linearKappa: CohenKappa
  /** Sites marked by both, by the first alone and by the second alone. */
  both: number
  onlyFirst: number
  onlySecond: number
  /** What follows for those missed by both. */
  capture: CaptureEstimate
}

export interface SitePattern {
  /** Index into siteLabels, in the order of the counters. */
  label: number[]
  sites: number
}

const isMarked = (label: number) => label === certain || label === doubtful

/** The labels of each site, [sites][counters]. */
function rowsOf({ label, counters, position }: Alignment): Uint8Array[] {
  const k = counters.length
  return Array.from(position, (_, s) => label.subarray(s * k, (s + 1) * k))
}

/** Candidates that lie within the tolerance of no site; null where none were given. */
export function unmarkedCandidates(
  candidates: Float64Array | null,
  alignment: Alignment,
  tolerance: number,
): number | null {
  if (!candidates) return null
  const { position, thickness } = alignment
  const sorted = candidates.toSorted()
  let unmarked = 0
  let near = 0
  for (const at of sorted) {
    checkFinite('candidate', at)
    while (near + 1 < position.length && Math.abs(position[near + 1] - at) <= Math.abs(position[near] - at)) near++
    if (Math.abs(position[near] - at) > tolerance * thickness[near]) unmarked++
  }
  return unmarked
}

/** Every pair of counters that looked at some site together; `unmarked` candidates were left out by both. */
export function pairAgreements(alignment: Alignment, unmarked: number): PairAgreement[] {
  const rows = rowsOf(alignment)
  const k = alignment.counters.length
  const pairs: PairAgreement[] = []
  for (let first = 0; first < k; first++) {
    for (let second = first + 1; second < k; second++) {
      // Two counters of different stretches share no site and cannot agree or disagree.
      const shared = rows.some((row) => row[first] !== unseen && row[second] !== unseen)
      if (shared) pairs.push(pairAgreement(alignment.counters, rows, [first, second], unmarked))
    }
  }
  return pairs
}

function pairAgreement(
  names: readonly string[],
  rows: readonly Uint8Array[],
  counters: [number, number],
  unmarked: number,
): PairAgreement {
  const table = Array.from({ length: labelKinds }, () => new Array<number>(labelKinds).fill(0))
  table[absent][absent] = unmarked
  for (const row of rows) {
    const [a, b] = [row[counters[0]], row[counters[1]]]
    if (a !== unseen && b !== unseen) table[a][b]++
  }
  const sum = (keep: (a: number, b: number) => boolean) =>
    table.reduce((all, row, a) => row.reduce((part, n, b) => part + (keep(a, b) ? n : 0), all), 0)
  const both = sum((a, b) => isMarked(a) && isMarked(b))
  const onlyFirst = sum((a, b) => isMarked(a) && !isMarked(b))
  const onlySecond = sum((a, b) => !isMarked(a) && isMarked(b))
  return {
    first: names[counters[0]],
    second: names[counters[1]],
    counters,
    table,
    kappa: cohenKappa(table),
    linearKappa: cohenKappa(table, 'linear'),
    both,
    onlyFirst,
    onlySecond,
    capture: captureRecapture(both + onlyFirst, both + onlySecond, both),
  }
}

export function fleissOf(alignment: Alignment, unmarked: number): FleissKappa | null {
  const k = alignment.counters.length
  const seenByAll = rowsOf(alignment).filter((row) => !row.includes(unseen))
  if (k < 2 || seenByAll.length + unmarked === 0) return null
  const ratings = seenByAll.map((row) => {
    const times = [0, 0, 0]
    for (const one of row) times[one]++
    return times
  })
  for (let i = 0; i < unmarked; i++) ratings.push([k, 0, 0])
  return fleissKappa(ratings)
}

/** Sites by how many counters marked them. */
export function chaoOf(alignment: Alignment): ChaoEstimate {
  const times = rowsOf(alignment).map((row) => row.reduce((sum, one) => sum + (isMarked(one) ? 1 : 0), 0))
  return chaoLowerBound(times.length, times.filter((n) => n === 1).length, times.filter((n) => n === 2).length)
}

export function patternsOf(alignment: Alignment): SitePattern[] {
  const patterns = new Map<string, SitePattern>()
  for (const row of rowsOf(alignment)) {
    const key = row.join('')
    const pattern = patterns.get(key) ?? { label: [...row], sites: 0 }
    pattern.sites++
    patterns.set(key, pattern)
  }
  // Ties by label, so that the order does not hang on which came first in the core.
  return [...patterns.entries()]
    .sort(([a, x], [b, y]) => y.sites - x.sites || (a < b ? 1 : -1))
    .map(([, pattern]) => pattern)
}

/** Sites where those who looked did not all say the same. */
export function disagreementsOf(alignment: Alignment): Int32Array {
  const sites = rowsOf(alignment).flatMap((row, s) => {
    const looked = row.filter((one) => one !== unseen)
    return looked.some((one) => one !== looked[0]) ? [s] : []
  })
  return Int32Array.from(sites)
}

/** Sites that not everyone who looked marked, with or without doubt. */
export function disputedOf(alignment: Alignment): Int32Array {
  const sites = rowsOf(alignment).flatMap((row, s) => (row.includes(absent) ? [s] : []))
  return Int32Array.from(sites)
}

/** Each counter's own position at each site, NaN where absent, [sites x counters], row-major. */
export function ownPositions({ mark, counters }: Alignment, counts: readonly CounterMarks[]): Float64Array {
  return Float64Array.from(mark, (one, at) => (one < 0 ? NaN : counts[at % counters.length].position[one]))
}

/** The half-layer rule on sites: certain where all who looked were certain; any doubt or disagreement makes half a year. */
export function siteHalfLayer(alignment: Alignment): HalfLayerError {
  const rows = rowsOf(alignment)
  const sure = rows.filter((row) => row.every((one) => one === certain || one === unseen)).length
  return halfLayerError(sure, rows.length - sure)
}
