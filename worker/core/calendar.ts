/**
 * Calendars. Inside, every year is astronomical (ISO 8601: 0 is 1 BCE, -1 is 2 BCE), so that years subtract;
 * only what is shown leaves out the year zero or counts back from a datum.
 */
import { checkFinite, checkInteger, checkOneOf, describe, Fault } from '../check.ts'
import { calYear, type CalYear } from '../units.ts'

/** How a calendar year is shown; varve years from the top are no calendar, they need no datum. */
export const calendars = ['ce', 'cal-bp', 'b2k', 'astronomical'] as const
export type Calendar = (typeof calendars)[number]

/** cal BP counts back from 1950 CE, b2k from 2000 CE. */
const calBpDatum = 1950
const b2kDatum = 2000
/** A typographic minus sign; numbers in files keep the plain hyphen. */
const minus = '\u2212'

/** Years before 1950 CE of an astronomical year: 1950 - year. */
export const calBpOf = (year: number): number => calBpDatum - year
/** Years before 2000 CE of an astronomical year: 2000 - year, so b2k = cal BP + 50. */
export const b2kOf = (year: number): number => b2kDatum - year
/** Astronomical year of an age in cal BP. */
export const yearOfCalBp = (age: number): CalYear => calYear(calBpDatum - age)
/** Astronomical year of an age in b2k. */
export const yearOfB2k = (age: number): CalYear => calYear(b2kDatum - age)

/** A year of the common calendar, which has no year zero. */
export interface CommonYear {
  year: number
  era: 'CE' | 'BCE'
}

/** The common-calendar name of an astronomical year (rounded to whole years): Y >= 1 is Y CE, Y <= 0 is (1 - Y) BCE. */
export function commonYearOf(year: number): CommonYear {
  const whole = Math.round(checkFinite('year', year))
  return whole >= 1 ? { year: whole, era: 'CE' } : { year: 1 - whole, era: 'BCE' }
}

/** Astronomical year of a year of the common calendar: n BCE is 1 - n. */
export function yearOfCommon({ year, era }: CommonYear): CalYear {
  checkInteger('year', year, 1)
  return calYear(checkOneOf('era', era, ['CE', 'BCE']) === 'CE' ? year : 1 - year)
}

/**
 * The number that an astronomical year has in a calendar. In 'ce' it stays astronomical for CE years and becomes
 * minus the BCE year before: a number for sorting axis ticks, never for arithmetic.
 */
export function yearIn(year: number, calendar: Calendar): number {
  switch (checkOneOf('calendar', calendar, calendars)) {
    case 'cal-bp':
      return calBpOf(year)
    case 'b2k':
      return b2kOf(year)
    case 'astronomical':
      return year
    case 'ce': {
      const common = commonYearOf(year)
      return common.era === 'CE' ? common.year : -common.year
    }
  }
}

/**
 * A year as people read it, for example "44 BCE", "−65 cal BP", "11703 b2k", "−43 (astronomical)".
 * `digits` are decimals of cal BP, b2k and astronomical years; CE and BCE, which have no zero to count from, stay whole.
 */
export function formatYear(year: number, calendar: Calendar, digits = 0): string {
  checkFinite('year', year)
  checkInteger('digits', digits, 0, 6)
  if (checkOneOf('calendar', calendar, calendars) === 'ce') {
    const common = commonYearOf(year)
    return `${common.year} ${common.era}`
  }
  const suffix = { 'cal-bp': 'cal BP', b2k: 'b2k', astronomical: '(astronomical)' }[calendar as Exclude<Calendar, 'ce'>]
  return `${signed(yearIn(year, calendar), digits)} ${suffix}`
}

/** Fixed decimals with a true minus sign, and no sign on a number that rounds to zero. */
function signed(value: number, digits: number): string {
  const text = Math.abs(value).toFixed(digits)
  return value < 0 && Number(text) !== 0 ? minus + text : text
}

/** ISO 8601 form of an astronomical year: four digits at least, signed before year 0000 and after 9999 (44 BCE is -0043). */
export function isoYear(year: number): string {
  const whole = Math.round(checkFinite('year', year))
  const digits = String(Math.abs(whole)).padStart(4, '0')
  if (whole < 0) return `-${digits}`
  return digits.length > 4 ? `+${digits}` : digits
}

/**
 * Reads a year as a person types it: "1875", "1875 CE", "44 BCE", "44 BC", "8186 cal BP", "11703 b2k", "-43".
 * A bare number is astronomical, which for positive years is the CE year. Plain "BP" is refused: it may be a radiocarbon age.
 */
export function parseYear(text: string): CalYear {
  const parts = /^([+-]?\d+(?:\.\d+)?)\s*(.*)$/.exec(text.trim().replace(minus, '-'))
  const read = parts ? yearNamed(Number(parts[1]), parts[2].toLowerCase().replace(/\s+/g, ' ')) : null
  if (read !== null) return read
  const forms = '1875 CE, 44 BCE, 8186 cal BP, 11703 b2k or -43'
  throw new Fault('argument', 'year', text, `year must be written like ${forms}; it is ${describe(text)}`)
}

function yearNamed(value: number, calendar: string): CalYear | null {
  if (calendar === '') return calYear(value)
  if (calendar === 'cal bp') return yearOfCalBp(value)
  if (calendar === 'b2k') return yearOfB2k(value)
  if (calendar === 'ce' || calendar === 'ad') return yearOfCommon({ year: value, era: 'CE' })
  if (calendar === 'bce' || calendar === 'bc') return yearOfCommon({ year: value, era: 'BCE' })
  return null
}

/** What ties a count to the calendar: the year of coring and whether the youngest couplet was still open in it. */
export interface CoringDatum {
  coringYear: number
  /** The couplet of the coring year had not closed and is left out of the count. */
  topYearOpen: boolean
}

/**
 * Calendar year in which varve k from the top was laid down (k = 1: the youngest varve counted).
 * Cored in July 2015, the couplet of 2015 is open and left out, so varve k is of 2015 - k; where the coring year's own
 * varve is closed and counted, it is of 2015 - k + 1 (common practice, no source). A varve year begins at the base of the
 * spring or summer layer; for winter caps formed after the turn of the year it keeps the number of the year it began in.
 */
export function varveYear(k: number, datum: CoringDatum): CalYear {
  checkFinite('varve number', k)
  checkFinite('coring year', datum.coringYear)
  return calYear(datum.coringYear - k + (datum.topYearOpen ? 0 : 1))
}
