import { absent, alignCounts, certain, doubtful } from './alignment.ts'
import type { Alignment } from './alignment.ts'
import { captureRecapture } from './captureRecapture.ts'
import type { CaptureEstimate } from './captureRecapture.ts'
import type { CounterMarks } from './counterMarks.ts'
import { halfLayerError, repeatCountError } from './countingError.ts'
import type { HalfLayerError, RepeatCountError } from './countingError.ts'
import { cohenKappa } from './kappa.ts'
import type { CohenKappa } from './kappa.ts'

/** Two counters side by side. */
export interface PairAgreement {
  first: string
  second: string
  /** Sites both marked, only the first, only the second. */
  both: number
  onlyFirst: number
  onlySecond: number
  kappa: CohenKappa
  capture: CaptureEstimate
}

/** What repeat counts of one stretch say, by the published conventions. */
export interface Agreement {
  /** Aligned sites; positions in the unit of the counts. */
  alignment: Alignment
  /** Each counter's own position at each site, NaN where absent, [sites x counters], row-major. */
  own: Float64Array
  /** Sites at which not all counters agree that there is a year, with or without doubt. */
  disputed: Int32Array
  totals: { name: string; certain: number; doubtful: number; halfLayer: HalfLayerError }[]
  /** Spread of the totals, doubtful layers as one half. */
  spread: RepeatCountError
  pairs: PairAgreement[]
}

/** Aligns two or more counts of the same stretch and sets the published conventions side by side. */
export function compareCounts(counts: CounterMarks[]): Agreement {
  const alignment = alignCounts(counts)
  const sites = alignment.position.length
  const k = counts.length
  const own = new Float64Array(sites * k)
  const disputed: number[] = []
  for (let site = 0; site < sites; site++) {
    let seen = 0
    for (let counter = 0; counter < k; counter++) {
      const mark = alignment.mark[site * k + counter]
      own[site * k + counter] = mark < 0 ? NaN : counts[counter].position[mark]
      if (mark >= 0) seen++
    }
    if (seen < k) disputed.push(site)
  }
  const totals = counts.map(({ name, position, doubtful: doubts }) => {
    const inDoubt = doubts.reduce((sum, one) => sum + one, 0)
    const sure = position.length - inDoubt
    return { name, certain: sure, doubtful: inDoubt, halfLayer: halfLayerError(sure, inDoubt) }
  })
  return {
    alignment,
    own,
    disputed: Int32Array.from(disputed),
    totals,
    spread: repeatCountError(totals.map(({ halfLayer }) => halfLayer.years)),
    pairs: counts.flatMap((_, a) => counts.slice(a + 1).map((__, i) => pairAgreement(alignment, a, a + 1 + i))),
  }
}

/** Both counters' labels at every site that either of them, or a third, marked. */
function pairAgreement({ counters, label, position }: Alignment, a: number, b: number): PairAgreement {
  const table = [
    [0, 0, 0],
    [0, 0, 0],
    [0, 0, 0],
  ]
  for (let site = 0; site < position.length; site++) {
    const first = label[site * counters.length + a]
    const second = label[site * counters.length + b]
    if (first <= certain && second <= certain) table[first][second]++
  }
  const onlyFirst = table[doubtful][absent] + table[certain][absent]
  const onlySecond = table[absent][doubtful] + table[absent][certain]
  const both = table[doubtful][doubtful] + table[doubtful][certain] + table[certain][doubtful] + table[certain][certain]
  return {
    first: counters[a],
    second: counters[b],
    both,
    onlyFirst,
    onlySecond,
    kappa: cohenKappa(table),
    capture: captureRecapture(both + onlyFirst, both + onlySecond, both),
  }
}
