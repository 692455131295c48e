import type { Chronology } from '../../../worker/core/chronology.ts'
import type { AgeDepthData, Calendar } from '../../view/plots/data.ts'

/** Half width of the 68 % band for a standard deviation of 1. */
const normal68 = 0.994457883

/** Years in the calendar shown; varve years count from the top, all others need an anchor (astronomical years). */
export function shownYears(chronology: Chronology, calendar: Calendar): Float64Array {
  const years = chronology.calendarYear
  if (calendar === 'varve' || !years) return chronology.varveYear
  if (calendar === 'CE') return years
  const datum = calendar === 'cal BP' ? 1950 : 2000
  return years.map((year) => datum - year)
}

/** A chronology as the age-depth plot takes it: depths in mm where there is a scale, else in pixels. */
export function ageDepthOf(
  chronology: Chronology,
  calendar: Calendar,
  centralName: string,
  spans: AgeDepthData['spans'],
): AgeDepthData {
  const years = shownYears(chronology, calendar)
  const band = (halfWidth: (i: number) => number) => ({
    low: years.map((year, i) => year - halfWidth(i)),
    high: years.map((year, i) => year + halfWidth(i)),
  })
  return {
    calendar,
    depth: chronology.depthMm,
    central: years,
    centralName,
    band68: band((i) => normal68 * chronology.sigma[i]),
    band95: band((i) => chronology.half95[i]),
    counters: [],
    dates: [],
    spans,
    depthUnit: chronology.depthMm[chronology.depthMm.length - 1] > 300 ? 'cm' : 'mm',
  }
}
