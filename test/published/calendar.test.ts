import { describe, expect, it } from 'vitest'
import { b2kOf, calBpOf, formatYear, isoYear, varveYear, yearOfCommon } from '../../worker/core/calendar.ts'

/** Exact, because the definitions are: cal BP before 1950 CE, b2k before 2000 CE, ISO 8601 with a year 0000. */
const table: [string, number, number, number][] = [
  ['2024 CE', 2024, -74, -24],
  ['2000 CE', 2000, -50, 0],
  ['1950 CE', 1950, 0, 50],
  ['1 CE', 1, 1949, 1999],
  ['1 BCE', 0, 1950, 2000],
  ['2 BCE', -1, 1951, 2001],
  ['44 BCE', -43, 1993, 2043],
  ['1600 BCE', -1599, 3549, 3599],
  ['1627 BCE', -1626, 3576, 3626],
  ['5051 BCE', -5050, 7000, 7050],
  ['6237 BCE', -6236, 8186, 8236],
  ['9704 BCE', -9703, 11653, 11703],
  ['10897 BCE', -10896, 12846, 12896],
  ['10931 BCE', -10930, 12880, 12930],
  ['12693 BCE', -12692, 14642, 14692],
]

describe('calendars: definitions of cal BP, b2k and ISO 8601 years', () => {
  it.each(table)('%s is astronomical %d, cal BP %d, b2k %d', (name, year, calBp, b2k) => {
    expect(formatYear(year, 'ce')).toBe(name)
    expect(calBpOf(year)).toBe(calBp)
    expect(b2kOf(year)).toBe(b2k)
  })

  it('10 BCE to 10 CE: 19 years apart, 20 layers inclusive', () => {
    const apart = yearOfCommon({ year: 10, era: 'CE' }) - yearOfCommon({ year: 10, era: 'BCE' })
    expect(apart).toBe(19)
    expect(apart + 1).toBe(20)
  })

  it('ISO 8601 writes 44 BCE as -0043', () => {
    expect(isoYear(-43)).toBe('-0043')
  })

  it('core taken in July 2015: varve k is of 2015 - k, the surface is -65 cal BP (common practice, no source)', () => {
    const datum = { coringYear: 2015, topYearOpen: true }
    expect([1, 2, 100].map((k) => varveYear(k, datum))).toEqual([2014, 2013, 1915])
    expect(calBpOf(2015)).toBe(-65)
  })
})
