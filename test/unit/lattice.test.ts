import { describe, expect, it } from 'vitest'
import { chainDefaults, countChain } from '../../worker/core/countChain.ts'
import type { CountedLayers } from '../../worker/core/countedLayers.ts'
import { builtInCurve, yearlyCurve } from '../../worker/core/curve.ts'
import { anchorYear, dateLikelihood } from '../../worker/core/dates.ts'
import type { CoreDate, DateKind } from '../../worker/core/dates.ts'
import { coreSamples, coreYearsBetween, dateCore } from '../../worker/core/dating.ts'
import type { DatingRequest } from '../../worker/core/dating.ts'
import { normalModel, studentModel } from '../../worker/core/errorModel.ts'
import { calendarAges, latticeDefaults, rangesAt } from '../../worker/core/lattice.ts'
import { momentsOf } from '../../worker/core/stepLaws.ts'
import { wiggleMatch } from '../../worker/core/wiggle.ts'
import { seededRandom } from '../../worker/random.ts'
import { finish } from '../../worker/work.ts'
import { drawCore } from '../fixtures/datedCore.ts'

const curve = yearlyCurve(builtInCurve())

/** Layers of 1 mm, each a year with a probability. */
function even(layers: number, probability: number): CountedLayers {
  return {
    depth: Float64Array.from({ length: layers }, (_, i) => i),
    thickness: new Float64Array(layers).fill(1),
    probability: new Float64Array(layers).fill(probability),
    kind: new Uint8Array(layers),
  }
}

function dateAt(id: string, kind: DateKind, layer: number, value: number, sigma: number): CoreDate {
  return { id, kind, top: layer + 0.5, base: layer + 0.5, value, sigma, offset: 0, offsetSigma: 0 }
}

function requestOf(layers: CountedLayers, dates: CoreDate[], topYear: number | null): DatingRequest {
  return { layers, dates, topYear, curves: [] }
}

describe('with exact counts and no bias', () => {
  it.each([
    ['normal', normalModel],
    ['Student-t', studentModel],
  ])('the lattice is the wiggle match (%s model), year by year to 1e-9', (_, model) => {
    const offsets = [0, 25, 60, 110, 150]
    const ages = [5288, 5187, 5223, 5088, 5032]
    const layers = even(151, 1)
    const dates = offsets.map((above, k) => ({ ...dateAt(`d${k}`, 'c14', 150 - above, ages[k], 25), model }))
    const result = finish(dateCore({ ...requestOf(layers, dates, null), lattice: { biasSd: 0 } }))
    const match = wiggleMatch(
      offsets.map((above, k) => ({ older: -above, age: ages[k], sigma: 25 })),
      curve,
      null,
      model,
    )
    expect(1950 - result.ages.median[150]).toBe(match.median)
    expect(1950 - result.ages.mean[150]).toBeCloseTo(match.mean, 6)
    expect(
      rangesAt(result.ages.hpd95, 150)
        .map(({ from, to }) => [1950 - to, 1950 - from])
        .reverse(),
    ).toEqual(match.hpd95.map(({ from, to }) => [from, to]))
    const { youngest, start, probability } = result.ages.density
    for (let k = start[150]; k < start[151]; k++) {
      const calBP = 1950 - (youngest[150] - (k - start[150]))
      expect(Math.abs(probability[k] - match.probability[calBP - match.from])).toBeLessThan(2e-8)
    }
  })

  it('an anchored core has its year at every layer, across 1 BCE and 1 CE without a year zero missing', () => {
    const { ages } = finish(dateCore({ ...requestOf(even(8, 1), [], 3), lattice: { biasSd: 0 } }))
    expect([...ages.median]).toEqual([3, 2, 1, 0, -1, -2, -3, -4])
    expect([...ages.sd]).toEqual(Array(8).fill(0))
  })
})

describe('an anchored count without dates', () => {
  it('has the mean and SD of its steps, and the bias grows in proportion to depth', () => {
    const n = 401
    const { ages } = finish(dateCore({ ...requestOf(even(n, 0.9), [], 2000), lattice: { biasSd: 0 } }))
    expect(ages.mean[n - 1]).toBeCloseTo(2000 - 360, 6)
    expect(ages.sd[n - 1]).toBeCloseTo(Math.sqrt(36), 6)
    const biased = finish(dateCore(requestOf(even(n, 0.9), [], 2000)))
    // Counting error and 2 % of 360 years in quadrature; the bias itself adds a little of its own chance.
    expect(biased.ages.sd[n - 1]).toBeGreaterThan(Math.hypot(6, 7.2))
    expect(biased.ages.sd[n - 1]).toBeLessThan(Math.hypot(6, 7.2) + 0.5)
  })
})

describe('dates', () => {
  it('of several levels, known years and radiocarbon, anchor a floating count and learn its bias', () => {
    // A hundred years passed in every 90 layers.
    const layers = even(451, 1)
    const dates = [
      dateAt('tephra', 'year', 90, 1600, 1),
      dateAt('ash', 'year', 450, 1200, 0),
      dateAt('leaf', 'c14', 270, curve.age[550], 20),
    ]
    const result = finish(dateCore({ ...requestOf(layers, dates, null), lattice: { biasSd: 0.1 } }))
    expect(result.ages.median[90]).toBeGreaterThanOrEqual(1599)
    expect(result.ages.median[450]).toBe(1200)
    expect(result.ages.sd[450]).toBe(0)
    expect(result.bias.mean).toBeCloseTo(1.11, 1)
    expect(result.bias.bayesFactor).toBeGreaterThan(100)
    expect(result.checks.map(({ id }) => id)).toEqual(['tephra', 'ash', 'leaf'])
  })

  it('within a range are taken as a flat one, an exact year as that year', () => {
    const dates = [{ ...dateAt('flood', 'year', 3, 1500, 4), shape: 'uniform' as const }]
    const { ages } = finish(dateCore({ ...requestOf(even(5, 1), dates, null), lattice: { biasSd: 0 } }))
    expect(rangesAt(ages.hpd95, 3)).toEqual([{ from: 1496, to: 1504, probability: expect.closeTo(1, 9) as number }])
    expect(ages.mean[0]).toBeCloseTo(1503, 9)
  })

  it('of a sample over several layers are compared with the mean of the curve over their years', () => {
    const layers = even(41, 1)
    const chain = countChain(layers, chainDefaults)
    const place = { level: 20, older: Float64Array.from([-10, 0, 10]), share: Float64Array.from([0.25, 0.5, 0.25]) }
    const { expected, from } = dateLikelihood(dateAt('peat', 'f14c', 20, 0.88, 0.003), place, curve)
    const at = 1000 - (from + 1950)
    expect(expected[at]).toBeCloseTo((curve.f14c[990] + 2 * curve.f14c[1000] + curve.f14c[1010]) / 4, 12)
    // Years off the curve are refused.
    expect(expected[5]).toBeNaN()
    expect(chain.levels).toBe(41)
  })

  it('that nothing else speaks for have no leave-one-out age', () => {
    const { checks } = finish(dateCore(requestOf(even(5, 1), [dateAt('leaf', 'c14', 2, 1000, 30)], null)))
    expect(checks[0]).toMatchObject({ medianWithout: NaN, residual: NaN, outlierProbability: NaN, hpd95Without: null })
  })

  it('that are off by far are called outliers and do not move the ages (Student-t)', () => {
    const layers = even(301, 0.95)
    const year = (layer: number) => Math.round(1000 - 0.95 * layer)
    const c14 = (layer: number) => curve.age[1950 - year(layer)]
    const good = [60, 150, 240, 290].map((layer) => dateAt(`c${layer}`, 'c14', layer, c14(layer), 25))
    const bad = dateAt('old wood', 'c14', 200, c14(200) + 600, 25)
    const without = finish(dateCore(requestOf(layers, good, 1000)))
    const result = finish(dateCore(requestOf(layers, [...good, bad], 1000)))
    const old = result.checks.find(({ id }) => id === 'old wood')
    expect(old?.outlierProbability).toBeGreaterThan(0.99)
    expect(result.crossCheck.outliers).toEqual(['old wood'])
    for (let layer = 0; layer < 301; layer++) {
      expect(Math.abs(result.ages.mean[layer] - without.ages.mean[layer])).toBeLessThan(1.5)
    }
    // Its level without it is the level where it was never measured.
    expect(old?.medianWithout).toBe(without.ages.median[200])
  })

  it('that cannot be true together are refused by name; without any the count has no calendar', () => {
    const layers = even(11, 1)
    const dates = [dateAt('a', 'year', 2, 1500, 0), dateAt('b', 'year', 8, 1499, 0)]
    expect(() => finish(dateCore({ ...requestOf(layers, dates, null), lattice: { biasSd: 0 } }))).toThrow(
      'no chronology without a bias fits the count and its dates together (a, b); check their years and depths, or allow the dates an error',
    )
    expect(() => finish(dateCore(requestOf(layers, [], null)))).toThrow(
      'nothing ties the count to the calendar; give the year of its top layer or at least one date',
    )
    expect(() => finish(dateCore(requestOf(layers, [dateAt('deep', 'year', 40, 1500, 1)], null)))).toThrow(
      'deep: the sample at 40.5 mm lies below the last layer, which ends at 11 mm',
    )
  })
})

describe('the bias', () => {
  const random = seededRandom(3)
  const core = drawCore(
    random,
    { layers: 600, leastProbability: 0.8, biasSd: 0.02, topYear: 500, dates: 5, outliers: 0 },
    curve,
  )
  const request = requestOf(core.layers, core.dates, 500)

  it('integrated on nodes found by halving agrees with a fine fixed grid', () => {
    const adaptive = finish(dateCore(request))
    const fine = finish(dateCore({ ...request, lattice: { biasNodes: 161 } }))
    for (let row = 0; row < 600; row++) {
      expect(Math.abs(adaptive.ages.mean[row] - fine.ages.mean[row])).toBeLessThan(0.05)
      expect(Math.abs(adaptive.ages.sd[row] - fine.ages.sd[row])).toBeLessThan(0.05)
    }
    expect(adaptive.logEvidence).toBeCloseTo(fine.logEvidence, 2)
  })

  it('the same request gives the same result, with progress on the way', () => {
    const work = dateCore(request)
    const stages = new Set<string>()
    let step = work.next()
    for (; !step.done; step = work.next()) {
      stages.add(step.value.stage)
      expect(step.value.done).toBeLessThanOrEqual(step.value.total)
    }
    expect([...stages]).toEqual(['bias', 'ages'])
    expect(step.value.ages).toEqual(finish(dateCore(request)).ages)
  })

  it('drawn chronologies have the moments of the exact ages, never go backwards, and follow the seed', () => {
    const exact = finish(dateCore(request))
    const samples = 2000
    const years = finish(coreSamples(request, samples, 11))
    const n = core.layers.depth.length
    for (const row of [0, 150, 299, 450, 599]) {
      const drawn = Array.from({ length: samples }, (_, s) => years[s * n + row])
      const mean = drawn.reduce((a, b) => a + b, 0) / samples
      const sd = Math.sqrt(drawn.reduce((a, b) => a + (b - mean) ** 2, 0) / samples)
      // Four standard errors.
      expect(Math.abs(mean - exact.ages.mean[row])).toBeLessThanOrEqual(4 * (exact.ages.sd[row] / Math.sqrt(samples)))
      expect(Math.abs(sd - exact.ages.sd[row])).toBeLessThanOrEqual(0.1 * exact.ages.sd[row])
    }
    const backwards = years.filter((year, k) => k % n !== 0 && year > years[k - 1])
    expect(backwards.length).toBe(0)
    expect(finish(coreSamples(request, 20, 11))).not.toEqual(finish(coreSamples(request, 20, 12)))
  })

  it('years between two levels: mean of the difference exact, spread as drawn, narrower than the two ages apart', () => {
    const exact = finish(dateCore(request))
    const between = momentsOf(finish(coreYearsBetween(request, 100, 500)))
    expect(between.mean).toBeCloseTo(exact.ages.mean[100] - exact.ages.mean[500], 5)
    const samples = 2000
    const years = finish(coreSamples(request, samples, 5))
    const drawn = Array.from({ length: samples }, (_, s) => years[s * 600 + 100] - years[s * 600 + 500])
    const mean = drawn.reduce((a, b) => a + b, 0) / samples
    const sd = Math.sqrt(drawn.reduce((a, b) => a + (b - mean) ** 2, 0) / samples)
    expect(Math.abs(sd - Math.sqrt(between.variance))).toBeLessThan(0.1 * sd)
    expect(finish(coreYearsBetween(request, 7, 7))).toEqual({ first: 0, probability: Float64Array.of(1) })
    const floating = { ...request, topYear: null }
    const above = momentsOf(finish(coreYearsBetween(floating, 0, 300)))
    const ages = finish(dateCore(floating)).ages
    expect(above.mean).toBeCloseTo(ages.mean[0] - ages.mean[300], 4)
    const apart = Math.hypot(ages.sd[0], ages.sd[300])
    expect(Math.sqrt(above.variance)).toBeLessThan(apart)
  })
})

describe('options', () => {
  it('are checked', () => {
    const chain = countChain(even(3, 1), chainDefaults)
    const dates = [anchorYear('top', 0, 2000)]
    const run = (lattice: Partial<typeof latticeDefaults>) => () =>
      finish(calendarAges(chain, dates, { ...latticeDefaults, ...lattice }))
    expect(run({ biasSd: -1 })).toThrow('bias SD must be between 0 and 0.5; it is -1')
    expect(run({ biasSd: NaN })).toThrow('bias SD must be between 0 and 0.5; it is NaN')
    expect(run({ biasNodes: 0 })).toThrow('number of bias nodes must be a whole number from 1 to 1001; it is 0')
    expect(run({ cut: 1 })).toThrow('cut must be between 0 and 0.001; it is 1')
  })
})
