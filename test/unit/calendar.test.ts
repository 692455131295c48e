import { describe, expect, it } from 'vitest'
import {
  b2kOf,
  calBpOf,
  commonYearOf,
  formatYear,
  isoYear,
  parseYear,
  varveYear,
  yearIn,
  yearOfB2k,
  yearOfCalBp,
  yearOfCommon,
} from '../../worker/core/calendar.ts'

describe('calendar', () => {
  it('has no year zero in CE and BCE', () => {
    expect(commonYearOf(1)).toEqual({ year: 1, era: 'CE' })
    expect(commonYearOf(0)).toEqual({ year: 1, era: 'BCE' })
    expect(commonYearOf(-1)).toEqual({ year: 2, era: 'BCE' })
    expect(() => yearOfCommon({ year: 0, era: 'BCE' })).toThrow('year must be a whole number of at least 1; it is 0')
  })

  it('reads back every whole year that it writes, in every calendar', () => {
    for (let year = -12000; year <= 2100; year += 7) {
      expect(yearOfCommon(commonYearOf(year))).toBe(year)
      expect(yearOfCalBp(calBpOf(year))).toBe(year)
      expect(yearOfB2k(b2kOf(year))).toBe(year)
      for (const calendar of ['ce', 'cal-bp', 'b2k'] as const) expect(parseYear(formatYear(year, calendar))).toBe(year)
      expect(parseYear(isoYear(year))).toBe(year)
    }
  })

  it('writes a true minus sign, and none on a rounded zero', () => {
    expect(formatYear(2015, 'cal-bp')).toBe('\u221265 cal BP')
    expect(formatYear(1950.2, 'cal-bp')).toBe('0 cal BP')
    expect(formatYear(1949.75, 'cal-bp', 2)).toBe('0.25 cal BP')
    expect(formatYear(-43, 'astronomical')).toBe('\u221243 (astronomical)')
    expect(formatYear(0.4, 'ce')).toBe('1 BCE')
  })

  it('writes ISO 8601 years with a sign before year 0000 and beyond four digits', () => {
    expect(isoYear(-43)).toBe('-0043')
    expect(isoYear(0)).toBe('0000')
    expect(isoYear(835)).toBe('0835')
    expect(isoYear(-10900)).toBe('-10900')
    expect(isoYear(12000)).toBe('+12000')
  })

  it('reads years as people type them', () => {
    expect(parseYear('1875')).toBe(1875)
    expect(parseYear(' 44BC ')).toBe(-43)
    expect(parseYear('44 bce')).toBe(-43)
    expect(parseYear('8186 cal  BP')).toBe(-6236)
    expect(parseYear('\u221243')).toBe(-43)
    expect(parseYear('1963 AD')).toBe(1963)
  })

  it('refuses what may be something else', () => {
    expect(() => parseYear('8186 BP')).toThrow(
      'year must be written like 1875 CE, 44 BCE, 8186 cal BP, 11703 b2k or -43; it is "8186 BP"',
    )
    expect(() => parseYear('about 1900')).toThrow('it is "about 1900"')
    expect(() => parseYear('0 CE')).toThrow('year must be a whole number of at least 1; it is 0')
    expect(() => formatYear(NaN, 'ce')).toThrow('year must be a finite number; it is NaN')
    expect(() => yearIn(1, 'julian' as never)).toThrow(
      'calendar must be one of ce, cal-bp, b2k, astronomical; it is "julian"',
    )
  })

  it('gives the top varve the year before coring when the open couplet is left out', () => {
    expect(varveYear(1, { coringYear: 2015, topYearOpen: true })).toBe(2014)
    expect(varveYear(1, { coringYear: 2015, topYearOpen: false })).toBe(2015)
    expect(() => varveYear(1, { coringYear: NaN, topYearOpen: true })).toThrow(
      'coring year must be a finite number; it is NaN',
    )
  })
})
