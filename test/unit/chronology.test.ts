import { describe, expect, it } from 'vitest'
import { buildChronology, cumulativeYears } from '../../worker/core/chronology.ts'
import type { ChronologyRequest, CountedBoundaries } from '../../worker/core/chronology.ts'

const count = (position: number[], doubtful: number[] = []): CountedBoundaries => ({
  position: Float64Array.from(position),
  doubtful: Uint8Array.from(position, (_, i) => (doubtful.includes(i) ? 1 : 0)),
})
const every10 = (years: number) => count(Array.from({ length: years }, (_, i) => 10 * (i + 1)))
const request = (fields: Partial<ChronologyRequest>): ChronologyRequest => ({
  count: every10(40),
  repeats: [],
  spans: [],
  mmPerPx: 0.1,
  depthTop: 5,
  convention: 'half-layer',
  anchorYear: null,
  ...fields,
})

describe('a chronology', () => {
  it('numbers the varves from the top and turns pixels into depth and thickness', () => {
    const chronology = buildChronology(request({}))
    expect([...chronology.varveYear.slice(0, 3)]).toEqual([1, 2, 3])
    expect(chronology.depthMm[0]).toBeCloseTo(6, 12)
    expect(chronology.thicknessMm[0]).toBeCloseTo(1, 12)
    expect(chronology.thicknessMm[39]).toBeNaN()
    expect(chronology.calendarYear).toBeNull()
  })

  it('counts doubtful layers half and adds their halves up linearly (Rasmussen et al. 2006)', () => {
    const chronology = buildChronology(
      request({
        count: { ...every10(40), doubtful: Uint8Array.from({ length: 40 }, (_, i) => (i % 10 === 9 ? 1 : 0)) },
      }),
    )
    expect(chronology.varveYear[39]).toBe(38)
    expect(chronology.half95[39]).toBe(2)
    expect(chronology.sigma[39]).toBe(1)
    expect([...chronology.half95]).toEqual([...chronology.half95].sort((a, b) => a - b))
  })

  it('takes mean, SD and the 95 % half-width of the mean from repeat counts (SD of 38, 40, 42 is 2; t 4.302653 with 2 df)', () => {
    const deep = [
      every10(40),
      count([...every10(40).position].filter((_, i) => i !== 5 && i !== 25)),
      count([...every10(40).position, 155.5, 255.5].sort((a, b) => a - b)),
    ]
    const chronology = buildChronology(request({ repeats: deep, convention: 'repeat-counts' }))
    expect(chronology.varveYear[39]).toBeCloseTo(40, 12)
    expect(chronology.sigma[39]).toBeCloseTo(2, 12)
    expect(chronology.half95[39]).toBeCloseTo((4.302653 * 2) / Math.sqrt(3), 5)
    expect(chronology.sigma[3]).toBeCloseTo(0, 12)
  })

  it('puts years into an unreadable span by the thickness of its neighbours, with the error of the renewal theorem', () => {
    const position = [...every10(20).position, ...every10(20).position.map((p) => p + 300)]
    const chronology = buildChronology(
      request({ count: count(position), spans: [{ from: 205, to: 305, kind: 'unreadable' }] }),
    )
    // 110 px between the boundaries that enclose it, 10 px a layer: 11 years, of which one would be counted anyway.
    expect(chronology.varveYear[20]).toBeCloseTo(31, 9)
    expect(chronology.unreadable.years).toBeCloseTo(10, 9)
    expect(chronology.unreadable.sd).toBeCloseTo(0, 9)
  })

  it('gives event beds neither years nor thickness', () => {
    const position = [10, 20, 80, 90]
    const chronology = buildChronology(
      request({ count: count(position), spans: [{ from: 25, to: 75, kind: 'event' }] }),
    )
    expect([...chronology.varveYear]).toEqual([1, 2, 3, 4])
    expect(chronology.thicknessMm[1]).toBeCloseTo(1, 12)
  })

  it('is anchored by the year of the youngest varve, across 1 BCE and 1 CE without a gap', () => {
    const chronology = buildChronology(request({ anchorYear: 2 }))
    expect([...chronology.calendarYear!.slice(0, 4)]).toEqual([2, 1, 0, -1])
  })

  it('lets a count that sets the same boundaries a pixel apart differ by a tenth of a year, not by one', () => {
    const shifted = count([...every10(40).position].map((p) => p + 1))
    const years = cumulativeYears(shifted, every10(40).position)
    expect(years[20]).toBeCloseTo(20.9, 12)
  })

  it('refuses what is no count, and says why', () => {
    expect(() => buildChronology(request({ count: count([10, 10]) }))).toThrow(
      'boundaries must be sorted downcore; boundary 2 is not below boundary 1',
    )
    expect(() => buildChronology(request({ count: count([10, NaN]) }))).toThrow(
      'position of boundary 2 must be a finite number; it is NaN',
    )
    expect(() => buildChronology(request({ convention: 'repeat-counts', repeats: [every10(3)] }))).toThrow(
      'needs at least 2 counts; there is 1',
    )
    expect(() =>
      buildChronology(request({ count: count([10, 90]), spans: [{ from: 20, to: 80, kind: 'unreadable' }] })),
    ).toThrow('at least 2 are needed')
  })
})
