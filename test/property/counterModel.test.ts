import { describe, expect, it } from 'vitest'
import type { CounterCells } from '../../worker/core/counterCells.ts'
import { sampleCounters } from '../../worker/core/counterModel.ts'
import { defaultCounterPriors } from '../../worker/core/counterPriors.ts'
import { logGamma } from '../../worker/core/incompleteBeta.ts'
import { wholeNumberInterval } from '../../worker/core/latentYears.ts'
import { seededRandom } from '../../worker/random.ts'
import { finish } from '../../worker/work.ts'

/** Without unequal clarity every rate can be integrated by hand, and the posterior be summed up over all possibilities. */
const priors = {
  ...defaultCounterPriors,
  missed: [2, 8],
  false: [2, 8],
  claritySd: 1e-6,
} satisfies typeof defaultCounterPriors

/** Labels of the two counters and how many sites have them. */
interface Pattern {
  label: [number, number]
  sites: number
}

const logBeta = (a: number, b: number) => logGamma(a) + logGamma(b) - logGamma(a + b)
const logChoose = (n: number, k: number) => logGamma(n + 1) - logGamma(k + 1) - logGamma(n - k + 1)

/**
 * The posterior of the number of years by enumeration: how many sites of each pattern are years, how many years left no
 * site, how many places tempted no one; the chances of missing, of false marks and of doubt integrated (Beta functions).
 */
function enumerate(patterns: readonly Pattern[], places: number): { mean: number; sd: number; real: number[] } {
  const states: { log: number; years: number; real: number[] }[] = []
  const [missA, missB] = priors.missed
  const [falseA, falseB] = priors.false
  const visit = (chosen: number[]): void => {
    if (chosen.length < patterns.length) {
      for (let n = 0; n <= patterns[chosen.length].sites; n++) visit([...chosen, n])
      return
    }
    const real = chosen.reduce((sum, n) => sum + n, 0)
    const wrong = patterns.reduce((sum, { sites }) => sum + sites, 0) - real
    let fixed = 0
    patterns.forEach(({ sites }, i) => (fixed += logChoose(sites, chosen[i])))
    const sum = (k: number, label: number, years: boolean) =>
      patterns.reduce(
        (all, one, i) => all + (one.label[k] === label ? (years ? chosen[i] : one.sites - chosen[i]) : 0),
        0,
      )
    for (const k of [0, 1]) {
      fixed += logBeta(priors.doubtfulIfTrue[0] + sum(k, 1, true), priors.doubtfulIfTrue[1] + sum(k, 2, true))
      fixed += logBeta(priors.doubtfulIfFalse[0] + sum(k, 1, false), priors.doubtfulIfFalse[1] + sum(k, 2, false))
    }
    const falseLogs = Array.from({ length: 80 }, (_, unmarked) => {
      let log = (wrong + unmarked) * Math.log(places) - logGamma(unmarked + 1)
      for (const k of [0, 1])
        log += logBeta(falseA + sum(k, 1, false) + sum(k, 2, false), falseB + sum(k, 0, false) + unmarked)
      return log
    })
    const most = Math.max(...falseLogs)
    fixed += most + Math.log(falseLogs.reduce((total, log) => total + Math.exp(log - most), 0))
    for (let unseen = 0; unseen < 60; unseen++) {
      const years = real + unseen
      let log = fixed + logGamma(years + 0.5) - logGamma(unseen + 1)
      for (const k of [0, 1]) {
        const missed = sum(k, 0, true) + unseen
        log += logBeta(missA + missed, missB + years - missed)
      }
      states.push({ log, years, real: chosen })
    }
  }
  visit([])
  const most = Math.max(...states.map(({ log }) => log))
  const weights = states.map(({ log }) => Math.exp(log - most))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const average = (value: (state: (typeof states)[number]) => number) =>
    states.reduce((sum, state, i) => sum + weights[i] * value(state), 0) / total
  const mean = average(({ years }) => years)
  return {
    mean,
    sd: Math.sqrt(average(({ years }) => (years - mean) ** 2)),
    real: patterns.map(({ sites }, i) => average(({ real }) => real[i]) / sites),
  }
}

const cases: { name: string; patterns: Pattern[] }[] = [
  {
    name: 'few marks, no doubt',
    patterns: [
      { label: [2, 2], sites: 7 },
      { label: [2, 0], sites: 3 },
      { label: [0, 2], sites: 1 },
    ],
  },
  {
    name: 'doubtful marks stand alone',
    patterns: [
      { label: [2, 2], sites: 6 },
      { label: [1, 2], sites: 1 },
      { label: [1, 0], sites: 3 },
      { label: [0, 2], sites: 2 },
      { label: [0, 1], sites: 1 },
    ],
  },
]

describe('the counter model', () => {
  it.each(cases)('agrees with enumeration of everything that may have happened: $name', ({ patterns }) => {
    const places = patterns.reduce(
      (sum, { label, sites }) => sum + (sites * label.filter((one) => one > 0).length) / 2,
      0,
    )
    const cells: CounterCells = {
      counters: 2,
      groups: [{ quality: 0, seenBy: Uint8Array.of(1, 1), places }],
      bins: 1,
      spacing: new Float64Array(1),
      cells: patterns.map(({ label, sites }) => ({ group: 0, bin: 0, label: Uint8Array.from(label), sites })),
      cellOfSite: new Int32Array(0),
    }
    const exact = enumerate(patterns, places)
    const draws = finish(sampleCounters(cells, { priors, draws: 20_000, burnIn: 1000, seed: 11 }))
    const mean = draws.years.reduce((sum, n) => sum + n, 0) / draws.years.length
    const sd = Math.sqrt(draws.years.reduce((sum, n) => sum + (n - mean) ** 2, 0) / draws.years.length)
    // Some 20,000 draws, a tenth of them worth an independent one: three standard errors of the mean are below 0.07 sd.
    expect(Math.abs(mean - exact.mean)).toBeLessThan(0.07 * exact.sd)
    expect(Math.abs(sd / exact.sd - 1)).toBeLessThan(0.07)
    for (const [i, probability] of exact.real.entries()) {
      expect(Math.abs(draws.probability[i] - probability)).toBeLessThan(0.02)
    }
  })

  it('ends the interval of a whole number so that over many posteriors 95 % of the truth is inside', () => {
    // Rounded normals with all spreads and every place between two whole numbers; the truth is drawn from the same.
    const random = seededRandom(5)
    let inside = 0
    let posteriors = 0
    for (let sd = 0.8; sd < 4; sd += 0.1) {
      for (let phase = 0; phase < 1; phase += 0.1) {
        const draws = Float64Array.from({ length: 2000 }, () => Math.round(100 + phase + sd * random.normal()))
        const [low, high] = wholeNumberInterval(draws)
        inside += draws.filter((n) => n >= low && n <= high).length / 2000
        posteriors++
      }
    }
    expect(Math.abs(inside / posteriors - 0.95)).toBeLessThan(0.004)
  })

  it('gives a whole number that is certain half a unit on either side', () => {
    expect(wholeNumberInterval(new Float64Array(100).fill(7))).toEqual([6.5, 7.5])
  })
})
