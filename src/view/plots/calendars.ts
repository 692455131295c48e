import { scaleLinear } from 'd3-scale'
import { decimalsFor, formatNumber, formatYearCE } from '../numbers.ts'
import type { AxisSpec } from './axes.ts'
import type { Calendar } from './data.ts'

const titles: Record<Calendar, { title: string; unit: string }> = {
  varve: { title: 'Varve years from top', unit: 'a' },
  CE: { title: 'Year', unit: 'CE' },
  'cal BP': { title: 'Age', unit: 'cal BP' },
  b2k: { title: 'Age', unit: 'b2k' },
}

/** The year axis of a calendar, older years on the side asked for: by default to the right, for CE to the left. */
export function yearAxis(
  calendar: Calendar,
  least: number,
  most: number,
  older: 'left' | 'right' = calendar === 'CE' ? 'left' : 'right',
): AxisSpec {
  // In CE older years are the smaller numbers, in all others the greater ones.
  const rising = (calendar === 'CE') === (older === 'left')
  const { title, unit } = titles[calendar]
  const axis: AxisSpec = { title, unit, start: rising ? least : most, end: rising ? most : least }
  if (calendar === 'CE') return { ...axis, unit: least > 0 ? unit : 'CE / BCE', ticks: yearTicksCE, text: yearTextCE }
  return { ...axis, text: (value, step) => formatNumber(value, decimalsFor(step)) }
}

/** Round years in the common era's own numbers: 100 BCE is the astronomical year −99, and there is no year 0. */
export function yearTicksCE(least: number, most: number, count: number): number[] {
  const plain = scaleLinear().domain([least, most]).ticks(count)
  const step = plain.length > 1 ? plain[1] - plain[0] : 1
  if (least > 0) return plain.filter(Number.isInteger)
  const ticks: number[] = []
  for (let year = Math.floor(least / step) * step; year <= most; year += step) {
    const astronomical = year > 0 ? year : 1 + year
    if (Number.isInteger(astronomical) && astronomical >= least && astronomical <= most) ticks.push(astronomical)
  }
  return ticks
}

function yearTextCE(year: number): string {
  return year === 1 ? '1 CE' : formatYearCE(year)
}
