import { describe, expect, it } from 'vitest'
import type { CountChain, GapLaw } from '../../worker/core/countChain.ts'
import { densityAt } from '../../worker/core/dates.ts'
import type { DateLikelihood } from '../../worker/core/dates.ts'
import { studentModel, densityOf, normalModel } from '../../worker/core/errorModel.ts'
import { calendarAges } from '../../worker/core/lattice.ts'
import type { LatticeOptions } from '../../worker/core/lattice.ts'
import { gapYears } from '../../worker/core/stepLaws.ts'
import { seededRandom } from '../../worker/random.ts'
import type { Random } from '../../worker/random.ts'
import { finish } from '../../worker/work.ts'

/** A chain of a few levels with every kind of step. */
function smallChain(random: Random): CountChain {
  const levels = 3 + random.below(4)
  const gaps = new Map<number, GapLaw>()
  const ends = new Float64Array(levels)
  const missed = new Float64Array(levels)
  for (let i = 1; i < levels; i++) {
    const kind = gaps.size > 0 ? 2 + random.below(6) : random.below(8)
    // One gap at most: paths are listed one by one.
    if (kind === 0) gaps.set(i, { kind: 'hiatus', from: 1, to: 3 })
    else if (kind === 1) gaps.set(i, { kind: 'unreadable', mean: 1 + 2 * random.uniform(), variance: random.uniform() })
    else {
      ends[i] = kind === 2 ? 1 : random.uniform()
      missed[i] = kind === 3 ? 0 : 0.2 * random.uniform()
    }
  }
  const levelOfRow = Int32Array.from({ length: levels }, (_, i) => i)
  return { levels, ends, missed, gaps, levelOfRow, depth: Float64Array.from(levelOfRow) }
}

/** A date with a table of its own: a bell, or a bell with heavy tails, or two bells. */
function smallDate(random: Random, id: string, level: number, centre: number): DateLikelihood {
  const out = 14
  const from = centre - out
  const density = densityOf(random.below(2) === 0 ? normalModel : studentModel)
  const at = centre + 3 * random.normal()
  const sigma = 0.7 + 2 * random.uniform()
  const second = random.below(3) === 0 ? at + 6 : at
  const values = Float64Array.from({ length: 2 * out + 1 }, (_, k) => {
    return density(from + k - at, sigma) + 0.5 * density(from + k - second, sigma)
  })
  return {
    id,
    kind: 'c14',
    level,
    from,
    density: values,
    most: Math.max(...values),
    expected: values.map((_, k) => from + k),
    spread: values.map(() => sigma),
    value: at,
    fixed: false,
  }
}

/** Every path of one bias: years taken at each step with their probability, written from the description of the steps. */
function stepOf(chain: CountChain, i: number, factor: number): Map<number, number> {
  const law = chain.gaps.get(i)
  const years = new Map<number, number>()
  if (law) {
    const { first, probability } = gapYears(law, factor)
    probability.forEach((p, k) => years.set(first + k, p))
    return years
  }
  const real = chain.ends[i] * Math.min(1, factor)
  const expected = (chain.ends[i] + chain.missed[i]) * factor
  const missed = expected - real
  for (const [end, p] of [
    [1, real],
    [0, 1 - real],
  ] as const) {
    for (const [miss, q] of [
      [1, missed],
      [0, 1 - missed],
    ] as const) {
      years.set(end + miss, (years.get(end + miss) ?? 0) + p * q)
    }
  }
  return years
}

/** Joint weight of all dates but one and of the years of every level, summed over all paths: for each level, by x. */
function enumerate(
  chain: CountChain,
  dates: DateLikelihood[],
  nodes: { factor: number; prior: number }[],
  without: number,
) {
  const sums = Array.from({ length: chain.levels }, () => new Map<number, number>())
  let total = 0
  const taken = dates.filter((_, d) => d !== without)
  const visit = (level: number, xs: number[], weight: number, factor: number): void => {
    const x = xs[level]
    for (const date of taken) if (date.level === level) weight *= densityAt(date, x)
    if (weight === 0) return
    if (level === chain.levels - 1) {
      total += weight
      xs.forEach((at, i) => sums[i].set(at, (sums[i].get(at) ?? 0) + weight))
      return
    }
    for (const [years, p] of stepOf(chain, level + 1, factor)) visit(level + 1, [...xs, x + years], weight * p, factor)
  }
  const anchor = dates.find(({ fixed }) => fixed)
  for (const { factor, prior } of nodes) {
    const [low, high] = anchor ? [anchor.from, anchor.from] : [-90, 40]
    for (let x = low; x <= high; x++) visit(0, [x], prior, factor)
  }
  for (const sum of sums) for (const [x, weight] of sum) sum.set(x, weight / total)
  return { sums, total }
}

const nodesOf = ({ biasSd, biasNodes }: LatticeOptions) =>
  Array.from({ length: biasSd === 0 ? 1 : (biasNodes ?? 0) }, (_, k) => {
    const z = biasSd === 0 ? 0 : 4 * ((2 * k) / ((biasNodes ?? 2) - 1) - 1)
    return { factor: Math.exp(biasSd * z), prior: Math.exp(-0.5 * z * z) }
  })

const moments = (sum: Map<number, number>) => {
  let mean = 0
  let square = 0
  for (const [x, p] of sum) {
    mean += x * p
    square += x * x * p
  }
  return { mean, sd: Math.sqrt(square - mean * mean) }
}

describe('the lattice against all paths one by one', () => {
  for (let seed = 1; seed <= 40; seed++) {
    it(`is exact to 1e-9, seed ${seed}`, () => {
      const random = seededRandom(seed)
      const chain = smallChain(random)
      const anchored = seed % 3 === 0
      const dates: DateLikelihood[] = []
      if (anchored) {
        const exact = { ...smallDate(random, 'top', 0, 0), from: -2, density: Float64Array.of(1), most: 1, fixed: true }
        dates.push(exact)
      }
      const count = 1 + random.below(3)
      for (let d = 0; d < count; d++) {
        const level = random.below(chain.levels)
        dates.push(smallDate(random, `d${d}`, level, level))
      }
      const options: LatticeOptions = { biasSd: seed % 4 === 0 ? 0 : 0.1, biasNodes: 5, cut: 1e-13 }
      const { ages, checks } = finish(calendarAges(chain, dates, options))
      const { sums } = enumerate(chain, dates, nodesOf(options), -1)
      for (let level = 0; level < chain.levels; level++) {
        const truth = moments(sums[level])
        // Of 1e-9 of probability at a distance of some years.
        expect(Math.abs(ages.mean[level] + truth.mean)).toBeLessThan(1e-8)
        expect(Math.abs(ages.sd[level] - truth.sd)).toBeLessThan(1e-8)
        const { youngest, start, probability } = ages.density
        for (let k = start[level]; k < start[level + 1]; k++) {
          const x = -(youngest[level] - (k - start[level]))
          expect(Math.abs(probability[k] - (sums[level].get(x) ?? 0))).toBeLessThan(1e-7)
        }
      }
      for (const [d, check] of checks.entries()) {
        if (dates[d].fixed || dates.length === 1) continue
        const { sums: others } = enumerate(chain, dates, nodesOf(options), d)
        check.without.probability.forEach((p, k) => {
          const truth = others[dates[d].level].get(check.without.low + k) ?? 0
          expect(Math.abs(p - truth), `${check.id} x ${check.without.low + k}`).toBeLessThan(1e-9)
        })
      }
    })
  }
})
