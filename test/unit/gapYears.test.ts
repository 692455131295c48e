import { describe, expect, it } from 'vitest'
import { buildChronology, independentLayers } from '../../worker/core/chronology.ts'
import type { ChronologyRequest, CountedBoundaries } from '../../worker/core/chronology.ts'
import { gapYears } from '../../worker/core/gapYears.ts'

const every = (step: number, layers: number, from = 0) =>
  Array.from({ length: layers }, (_, i) => from + step * (i + 1))
const count = (position: number[], doubtful: number[] = []): CountedBoundaries => ({
  position: Float64Array.from(position),
  doubtful: Uint8Array.from(position, (_, i) => (doubtful.includes(i) ? 1 : 0)),
})
const request = (fields: Partial<ChronologyRequest>): ChronologyRequest => ({
  count: count(every(10, 40)),
  repeats: [],
  spans: [],
  mmPerPx: 0.1,
  depthTop: 0,
  convention: 'half-layer',
  anchorYear: null,
  ...fields,
})

describe('years where none can be counted', () => {
  it('an unreadable span between layers of 10 px above and 20 px below: 7.5 years by the mean, an even range from 5 to 10 added', () => {
    // Boundaries to 100, then from 200 on every 20: the span leaves 100 px, twenty layers of 10 and 20 around it.
    const position = Float64Array.from([...every(10, 11), ...every(20, 11, 190)])
    const { unreadable } = gapYears(position, [{ from: 115, to: 205, kind: 'unreadable' }])
    const [[row, { mean, variance }]] = [...unreadable]
    expect(row).toBe(10)
    // 100 px / 15 px; ten layers of 10 and ten of 20: mean 15, SD (n - 1) 5.1299.
    expect(mean).toBeCloseTo(100 / 15 - 1, 9)
    const ratio = (25 * 20) / 19 / 225
    const n = 100 / 15
    expect(variance).toBeCloseTo(n * ratio + (n * n * ratio) / 20 + (100 / 10 - 100 / 20) ** 2 / 12, 9)
  })

  it('event beds inside an unreadable span are taken out first', () => {
    const position = Float64Array.from([...every(10, 10), ...every(10, 10, 200)])
    const spans = [
      { from: 105, to: 145, kind: 'unreadable' as const },
      { from: 145, to: 195, kind: 'event' as const },
    ]
    expect([...gapYears(position, spans).unreadable.values()][0].mean).toBeCloseTo(6 - 1, 9)
  })

  it('a hiatus of 0 to 20 years adds 10, any number as likely as another; the count stays closed', () => {
    const chronology = buildChronology(request({ spans: [{ from: 105, to: 105, kind: 'hiatus', years: [0, 20] }] }))
    expect(chronology.hiatus.years).toBe(10)
    expect(chronology.hiatus.sd).toBeCloseTo(Math.sqrt((21 * 21 - 1) / 12), 12)
    expect(chronology.varveYear[9]).toBe(10)
    expect(chronology.varveYear[10]).toBe(21)
    expect(chronology.sigma[10]).toBeCloseTo(Math.sqrt(440 / 12), 12)
    expect(chronology.openFrom).toBeNull()
    expect(chronology.thicknessMm[9]).toBeNaN()
  })

  it('a hiatus of unknown length adds none and leaves all below open', () => {
    const chronology = buildChronology(request({ spans: [{ from: 105, to: 108, kind: 'hiatus' }] }))
    expect(chronology.openFrom).toBe(10)
    expect(chronology.varveYear[10]).toBe(11)
  })

  it('refuses a hiatus whose range runs backwards', () => {
    expect(() => buildChronology(request({ spans: [{ from: 105, to: 105, kind: 'hiatus', years: [20, 3] }] }))).toThrow(
      'most years of a hiatus must be a number of at least 20; it is 3',
    )
  })
})

describe('conventions of the error', () => {
  it('doubtful layers as independent coins grow with the square root, not linearly: 16 of them give 2, not 8', () => {
    const sixteen = { count: count(every(10, 40), every(1, 16)) }
    const linear = buildChronology(request(sixteen))
    const independent = buildChronology(request({ ...sixteen, convention: 'half-layer-independent' }))
    expect(linear.half95[39]).toBe(8)
    expect(independent.sigma[39]).toBeCloseTo(2, 12)
    expect(independent.varveYear[39]).toBe(linear.varveYear[39])
  })

  it('sites give their expected years and SD to the boundaries nearest to them', () => {
    const sites = independentLayers(Float64Array.from([11, 19, 25, 30.5]), Float64Array.from([1, 0.9, 0.5, 1]))
    const chronology = buildChronology(request({ count: count([10, 20, 30]), convention: 'sites', sites }))
    expect([...chronology.varveYear].map((year) => Number(year.toFixed(9)))).toEqual([1, 1.9, 3.4])
    expect(chronology.sigma[2]).toBeCloseTo(Math.sqrt(0.09 + 0.25), 12)
    expect(() => buildChronology(request({ convention: 'sites' }))).toThrow('compare the counts first')
  })

  it('the bias that all counters share is a term of its own and changes no other', () => {
    const plain = buildChronology(request({}))
    const biased = buildChronology(request({ systematicSd: 0.02 }))
    expect(biased.systematic[39]).toBeCloseTo(0.8, 12)
    expect(plain.systematic[39]).toBe(0)
    expect(biased.half95).toEqual(plain.half95)
    expect(() => buildChronology(request({ systematicSd: NaN }))).toThrow(
      'systematic SD must be between 0 and 1; it is NaN',
    )
  })
})
