import { describe, expect, it } from 'vitest'
import type { CounterMarks } from '../../worker/core/counterMarks.ts'
import { compareCounts, type AgreementOptions } from '../../worker/core/counts.ts'
import { defaultSampler } from '../../worker/core/counterModel.ts'
import { finish } from '../../worker/work.ts'
import { simulateCore, usualCores } from '../fixtures/simulatedCounts.ts'

const few = { sampler: { ...defaultSampler, draws: 400, burnIn: 200 } }
const compare = (counts: CounterMarks[], options: Partial<AgreementOptions> = {}) =>
  finish(compareCounts(counts, { ...few, ...options }))
const every10 = (layers: number, without: number[] = []) =>
  Array.from({ length: layers }, (_, i) => 10 * (i + 1)).filter((x) => !without.includes(x))
const counter = (
  name: string,
  position: number[],
  doubtful: number[] = [],
  range: CounterMarks['range'] = null,
): CounterMarks => ({
  name,
  position: Float64Array.from(position),
  doubtful: Uint8Array.from(position, (x) => (doubtful.includes(x) ? 1 : 0)),
  range,
})
const core = simulateCore(3, { ...usualCores, years: [300, 300] })

describe('compareCounts', () => {
  it('tells the errors between horizons and cumulatively; they add up to the whole', () => {
    const { intervals, cumulative, whole } = compare(core.counts, { horizons: [200, 100] })
    expect(intervals.map(({ from, to }) => [from, to])).toEqual([
      [-Infinity, 100],
      [100, 200],
      [200, Infinity],
    ])
    for (const k of [0, 1, 2]) {
      const sum = intervals.reduce((total, { years }) => total + years[k], 0)
      expect(sum).toBe(whole.years[k])
      expect(cumulative[1].years[k]).toBe(intervals[0].years[k] + intervals[1].years[k])
    }
    const years = intervals.reduce((total, { latent }) => total + latent!.years, 0)
    expect(years).toBeCloseTo(whole.latent!.years, 6)
    expect(cumulative[2].latent!.years).toBeCloseTo(whole.latent!.years, 6)
  })

  it('gives years and SD downcore that end at the total', () => {
    const { latent } = compare(core.counts)
    const { yearsTo, sdTo, expectedYears, sdYears } = latent!
    expect(Math.abs(yearsTo.at(-1)! - expectedYears)).toBeLessThan(0.2 * sdYears)
    expect(Math.abs(sdTo.at(-1)! / sdYears - 1)).toBeLessThan(0.3)
    for (let s = 1; s < yearsTo.length; s++) {
      expect(yearsTo[s]).toBeGreaterThanOrEqual(yearsTo[s - 1])
    }
  })

  it('gives the same figures for the same seed, close ones for another', () => {
    const first = compare(core.counts).latent!
    expect(compare(core.counts).latent).toEqual(first)
    const other = compare(core.counts, { sampler: { ...few.sampler, seed: 2 } }).latent!
    expect(other.expectedYears).not.toBe(first.expectedYears)
    expect(Math.abs(other.expectedYears - first.expectedYears)).toBeLessThan(first.sdYears)
  })

  it('keeps the shared bias apart: it widens its own interval and no other figure', () => {
    const without = compare(core.counts, { systematicSd: 0 }).latent!
    const withBias = compare(core.counts, { systematicSd: 0.05 }).latent!
    expect(withBias.years95).toEqual(without.years95)
    expect(withBias.sdYears).toBe(without.sdYears)
    expect(without.systematic.years95).toEqual(without.years95)
    const [low, high] = withBias.systematic.years95
    expect((high - low) / withBias.expectedYears).toBeGreaterThan(2 * 1.9 * 0.05)
    expect((high - low) / withBias.expectedYears).toBeLessThan(2 * 2.1 * 0.05)
  })

  it('finds who misses and who marks falsely', () => {
    const careless = simulateCore(8, {
      ...usualCores,
      years: [1200, 1200],
      missed: [0.01, 0.01],
      false: [0.005, 0.005],
    })
    const [a] = careless.counts
    // The first counter now misses every twelfth year and doubles every tenth.
    const kept = [...a.position].filter((_, i) => i % 12 !== 5)
    const doubled = kept.flatMap((x, i) => (i % 10 === 3 && i > 0 ? [(x + kept[i - 1]) / 2, x] : [x]))
    const { counters } = compare([counter('A', doubled), ...careless.counts.slice(1)]).latent!
    expect(counters[0].missed.mean).toBeGreaterThan(0.07)
    expect(counters[0].missed.mean).toBeLessThan(0.12)
    expect(counters[0].false.mean).toBeGreaterThan(0.07)
    expect(counters[0].false.mean).toBeLessThan(0.12)
    for (const { missed, false: wrong } of counters.slice(1)) {
      expect(missed.interval95[1]).toBeLessThan(0.04)
      expect(wrong.interval95[1]).toBeLessThan(0.03)
    }
  })

  it('says with two counters what the answer rests on, and widens it', () => {
    const two = compare(core.counts.slice(0, 2)).latent!
    const three = compare(core.counts).latent!
    expect(two.assumptions[0]).toContain('Two counters only')
    expect(three.assumptions.join(' ')).not.toContain('Two counters only')
    expect(two.years95[1] - two.years95[0]).toBeGreaterThan(three.years95[1] - three.years95[0])
  })

  it('has for a single counter the half-layer rule and nothing else', () => {
    const { latent, probability, whole, pairs, fleiss, totals } = compare([counter('A', every10(20), [30, 70])])
    expect(latent).toBeNull()
    expect(whole.latent).toBeNull()
    expect([...probability.slice(0, 4)]).toEqual([1, 1, 0.5, 1])
    expect(totals[0].halfLayer).toEqual({ years: 19, mce: 1, sigma: 0.5, independentSd: Math.sqrt(0.5) })
    expect([pairs.length, fleiss]).toEqual([0, null])
  })

  it('makes half a year of every site with doubt or disagreement, by the half-layer rule on sites', () => {
    const { siteHalfLayer, disputed, disagreements, chao, patterns } = compare([
      counter('A', every10(20), [30]),
      counter('B', every10(20, [50])),
      counter('C', every10(20), [30]),
    ])
    expect([siteHalfLayer.years, siteHalfLayer.mce]).toEqual([19, 1])
    expect([...disputed]).toEqual([4])
    expect([...disagreements]).toEqual([2, 4])
    expect([chao.seen, chao.once, chao.twice]).toEqual([20, 0, 1])
    expect(patterns).toEqual([
      { label: [2, 2, 2], sites: 18 },
      { label: [2, 0, 2], sites: 1 },
      { label: [1, 2, 1], sites: 1 },
    ])
  })

  it('counts candidates that no one marked as agreement to leave out, which kappa needs', () => {
    const counts = [counter('A', every10(20)), counter('B', every10(20, [50]))]
    const candidates = Float64Array.from([...every10(20), 15, 25, 35.2, 500.3])
    const { unmarkedCandidates, pairs } = compare(counts, { candidates })
    expect(unmarkedCandidates).toBe(4)
    expect(pairs[0].table).toEqual([
      [4, 0, 0],
      [0, 0, 0],
      [1, 0, 19],
    ])
    expect(pairs[0].kappa.kappa).toBeGreaterThan(0.8)
    const blind = compare(counts).pairs[0].kappa
    expect(blind.kappa).toBe(0)
    expect(blind.paradox).toContain('almost every site is marked by both')
  })

  it('leaves a counter out of a stretch they did not look at whole, and out of pairs with no site in common', () => {
    const { whole, intervals, pairs, alignment } = compare(
      [
        counter('A', every10(40)),
        counter('B', every10(20), [], { from: 0, to: 204 }),
        counter('C', every10(40).slice(20), [], { from: 206, to: 400 }),
      ],
      { horizons: [205] },
    )
    expect(alignment.position.length).toBe(40)
    expect(whole.years).toEqual([40, NaN, NaN])
    expect(whole.repeat!.counts).toEqual([40])
    expect(intervals.map(({ years }) => years)).toEqual([
      [20, 20, NaN],
      [20, NaN, 20],
    ])
    expect(pairs.map(({ first, second }) => `${first} ${second}`)).toEqual(['A B', 'A C'])
  })

  it('lets rates differ by quality: years missed in a poor stretch do not make the clear one doubtful', () => {
    const poor = every10(400).filter((x) => x <= 2000 || x % 60 !== 0)
    const counts = [counter('A', poor), counter('B', every10(400)), counter('C', every10(400))]
    const plain = compare(counts).latent!
    const told = compare(counts, { quality: [{ from: 2005, to: 4100, quality: 'poor' }] }).latent!
    expect(told.counters[0].missed.mean).toBeCloseTo(plain.counters[0].missed.mean, 2)
    expect(told.probability.length).toBe(400)
    expect(() => compare(counts, { quality: [{ from: 9, to: 9, quality: 'fair' }] })).toThrow(
      'span 1 of quality must end below its start; it runs from 9 to 9',
    )
    expect(() => compare(counts, { quality: [{ from: 1, to: 9, quality: 'good' as 'fair' }] })).toThrow(
      'quality of span 1 must be one of clear, fair, poor; it is "good"',
    )
  })

  it('refuses what it cannot mean', () => {
    const twice = [counter('A', every10(9)), counter('A', every10(9))]
    expect(() => compare(twice)).toThrow('two counts are called A; give each counter and each pass a name of its own')
    expect(() => compare(core.counts, { systematicSd: NaN })).toThrow(
      'systematic SD must be between 0 and 1; it is NaN',
    )
    expect(() => compare(core.counts, { horizons: [1, NaN] })).toThrow('horizon 2 must be a finite number; it is NaN')
    expect(() => compare(core.counts, { sampler: { ...defaultSampler, draws: 3 } })).toThrow(
      'draws must be a whole number of at least 100; it is 3',
    )
  })

  it('yields progress often enough to be cancelled', () => {
    const work = compareCounts(core.counts)
    const first = work.next()
    expect(first.value).toEqual({ stage: 'alignment', done: 0, total: 1 })
    let yields = 1
    while (!work.next().done) yields++
    expect(yields).toBeGreaterThan(20)
  })
})
