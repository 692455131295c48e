import { checkInteger, checkWithin, Fault } from '../check.ts'
import type { CountChain } from './countChain.ts'
import type { DateLikelihood } from './dates.ts'

export interface LatticeOptions {
  /** Standard deviation of the logarithm of the bias factor shared by the whole count; 0: no bias. */
  biasSd: number
  /** Bias nodes, equally spaced over +-4 SD; null: as many as the ages ask for, found by halving the spacing. */
  biasNodes: number | null
  /** No more than this share of the posterior is left out by the bands. */
  cut: number
}

export const latticeDefaults: LatticeOptions = { biasSd: 0.02, biasNodes: null, cut: 1e-9 }

/** The count and its dates, sorted and checked: what every pass over the lattice starts from. */
export interface LatticeProblem {
  chain: CountChain
  options: LatticeOptions
  /** Sorted downcore. */
  dates: readonly DateLikelihood[]
  /** Indices into `dates` by level. */
  datesAt: ReadonlyMap<number, readonly number[]>
  /** Levels of the first and the last date; above and below, nothing but the count speaks. */
  first: number
  last: number
  /** Log of the product of the largest likelihoods of all dates below a level, [levels]: what a path may still gain. */
  logStillToGain: Float64Array
}

export function latticeProblem(
  chain: CountChain,
  dates: readonly DateLikelihood[],
  options: LatticeOptions,
): LatticeProblem {
  checkWithin('bias SD', options.biasSd, 0, 0.5)
  if (options.biasNodes !== null) checkInteger('number of bias nodes', options.biasNodes, 1, 1001)
  checkWithin('cut', options.cut, 0, 1e-3)
  if (dates.length === 0) {
    throw new Fault(
      'argument',
      'dates',
      0,
      'nothing ties the count to the calendar; give the year of its top layer or at least one date',
    )
  }
  const sorted = dates.toSorted((a, b) => a.level - b.level)
  const datesAt = new Map<number, number[]>()
  for (const [d, date] of sorted.entries()) {
    checkInteger(`level of ${date.id}`, date.level, 0, chain.levels - 1)
    if (!(date.most > 0)) {
      throw new Fault('conflict', date.id, date.value, `no year is possible for ${date.id}; check its value and sigma`)
    }
    datesAt.set(date.level, [...(datesAt.get(date.level) ?? []), d])
  }
  const logStillToGain = new Float64Array(chain.levels)
  let log = 0
  for (let i = chain.levels - 1; i >= 0; i--) {
    logStillToGain[i] = log
    for (const d of datesAt.get(i) ?? []) log += Math.log(sorted[d].most)
  }
  return {
    chain,
    options,
    dates: sorted,
    datesAt,
    first: sorted[0].level,
    last: sorted[sorted.length - 1].level,
    logStillToGain,
  }
}
