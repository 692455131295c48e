import { Fault, describe } from '../check.ts'
import { calBpOf } from './calendar.ts'
import type { Curve } from './curve.ts'

/** What the reader of a curve file needs besides its text. */
export interface CurveFileName {
  /** Name of the file, for messages and reports. */
  name: string
  /** SHA-256 of the file's bytes. */
  sha256: string
}

/** Columns of a curve file, by index. */
interface Columns {
  time: number
  /** Time is cal BP or a decimal calendar year. */
  timeIs: 'cal BP' | 'year'
  value: number
  sigma: number
  quantity: Curve['quantity']
}

interface Row {
  line: number
  time: number
  value: number
  sigma: number
}

/** IntCal's own tables hold fewer than 10,000 rows; far beyond that the file is something else. */
const mostRows = 200_000
/** How many bad rows a message lists before it only counts them. */
const rowsListed = 5
/** A calendar year of a post-bomb curve is used if at least this many of its values are there. */
const leastPerYear = 6

/**
 * Reads a calibration curve in the comma-separated layout in which the IntCal group publishes its curves: comment lines
 * begin with #, rows are cal BP, 14C age, sigma, and may go on (Delta14C); any order of rows. A first line of column names
 * may say otherwise: `cal_bp` or `year`, and `c14_age` or `F14C` (post-bomb curves), each followed by its error.
 * Values of a year-by-year curve with several rows a year are averaged over the calendar year.
 */
export function parseCurve(text: string, { name, sha256 }: CurveFileName): Curve {
  const lines = text.replace(/^\ufeff/, '').split(/\r\n|\r|\n/)
  if (lines.length > mostRows) {
    const message = `${name}: a calibration curve has at most ${mostRows} rows; this file has ${lines.length} lines`
    throw new Fault('too-large', 'curve', lines.length, message)
  }
  const comments: string[] = []
  const problems: string[] = []
  const rows: Row[] = []
  let columns: Columns | null = null
  for (const [i, raw] of lines.entries()) {
    const line = raw.trim()
    if (line === '') continue
    if (line.startsWith('#')) {
      comments.push(line.replace(/^#+\s*/, ''))
      continue
    }
    const fields = line.split(',').map((field) => field.trim())
    if (columns === null) {
      const named = isHeader(fields)
      columns = named ? columnsNamed(fields, name) : plainColumns
      if (named) continue
    }
    const row = rowOf(fields, i + 1, columns)
    if (typeof row === 'string') problems.push(row)
    else rows.push(row)
  }
  if (columns === null) throw new Fault('format', 'curve', '', `${name} holds no rows; expected cal BP, 14C age, sigma`)
  refuse(name, problems)
  return curveOf(columns, rows, { name, sha256 }, comments)
}

const plainColumns: Columns = { time: 0, timeIs: 'cal BP', value: 1, sigma: 2, quantity: 'age' }

const isHeader = (fields: string[]) => fields[0] !== '' && Number.isNaN(Number(fields[0])) && /[a-z]/i.test(fields[0])

/** Finds the columns by name; spelling aside, "CAL BP", "14C age", "F14C". The error is the column after the value. */
function columnsNamed(fields: string[], name: string): Columns {
  const plain = fields.map((field) => field.toLowerCase().replace(/[^a-z0-9]/g, ''))
  const find = (...names: string[]) => plain.findIndex((field) => names.includes(field))
  const calBP = find('calbp', 'calagebp', 'calyrbp')
  const year = find('year', 'yearce', 'yearad', 'calendaryear')
  const age = find('c14age', '14cage', 'c14agebp', '14cagebp')
  const f14c = find('f14c')
  const time = calBP >= 0 ? calBP : year
  const value = age >= 0 ? age : f14c
  if (time < 0 || value < 0 || value + 1 >= fields.length) {
    const message = `${name}: the column names ${describe(fields.join(','))} are not understood; expected cal_bp or year, then c14_age or F14C followed by its sigma`
    throw new Fault('format', 'curve', fields.join(','), message)
  }
  return {
    time,
    timeIs: calBP >= 0 ? 'cal BP' : 'year',
    value,
    sigma: value + 1,
    quantity: age >= 0 ? 'age' : 'f14c',
  }
}

/** One row, or what is wrong with it. */
function rowOf(fields: string[], line: number, columns: Columns): Row | string {
  const wanted = [
    [columns.timeIs, columns.time],
    [columns.quantity === 'age' ? '14C age' : 'F14C', columns.value],
    ['sigma', columns.sigma],
  ] as const
  const numbers: number[] = []
  for (const [what, index] of wanted) {
    const field = index < fields.length ? fields[index] : ''
    if (field === '') return `row ${line}: ${what} is missing`
    const value = Number(field)
    if (!Number.isFinite(value)) return `row ${line}: ${what} ${describe(field)} is not a number`
    numbers.push(value)
  }
  const [time, value, sigma] = numbers
  if (!(sigma > 0)) return `row ${line}: sigma must be greater than 0; it is ${sigma}`
  const [least, most] = columns.timeIs === 'year' ? [-60_000, 2200] : [-250, 62_000]
  if (!(time >= least && time <= most)) {
    return `row ${line}: ${columns.timeIs} must lie between ${least} and ${most}; it is ${time}`
  }
  if (columns.quantity === 'f14c' && !(value > 0 && value < 5)) {
    return `row ${line}: F14C must lie between 0 and 5; it is ${value}`
  }
  return { line, time, value, sigma }
}

/** Sorts young to old, averages several rows of one calendar year, refuses two rows for one age. */
function curveOf(columns: Columns, rows: Row[], { name, sha256 }: CurveFileName, comments: string[]): Curve {
  const dated = columns.timeIs === 'year' ? yearMeans(rows) : rows
  const sorted = [...dated].sort((a, b) => a.time - b.time)
  const problems: string[] = []
  for (let i = 1; i < sorted.length; i++) {
    if (sorted[i].time === sorted[i - 1].time) {
      const [first, second] = [sorted[i - 1].line, sorted[i].line].sort((a, b) => a - b)
      problems.push(`row ${second}: ${sorted[i].time} cal BP stands already in row ${first}`)
    }
  }
  refuse(name, problems)
  if (sorted.length < 2) {
    throw new Fault(
      'format',
      'curve',
      sorted.length,
      `${name}: a curve needs at least two rows; this file has ${sorted.length}`,
    )
  }
  return {
    name,
    sha256,
    citation: comments.slice(0, 3).join(' ').slice(0, 300),
    reduced: false,
    quantity: columns.quantity,
    calBP: Float64Array.from(sorted, (row) => row.time),
    value: Float64Array.from(sorted, (row) => row.value),
    sigma: Float64Array.from(sorted, (row) => row.sigma),
  }
}

/**
 * Means over calendar years, as whole cal BP: decimal years 1963.00 to 1963.99 are the year 1963, which is -13 cal BP.
 * The errors of one year's values are taken as fully shared, so the mean keeps their mean; as the season in which the dated
 * matter grew is not known, the scatter of the year's values comes in beside it.
 */
function yearMeans(rows: Row[]): Row[] {
  const byYear = new Map<number, Row[]>()
  for (const row of rows) {
    const year = Math.floor(row.time)
    byYear.set(year, [...(byYear.get(year) ?? []), row])
  }
  const several = [...byYear.values()].some((values) => values.length > 1)
  const means: Row[] = []
  for (const [year, values] of byYear) {
    if (several && values.length < leastPerYear) continue
    const mean = (pick: (row: Row) => number) => values.reduce((sum, row) => sum + pick(row), 0) / values.length
    const value = mean((row) => row.value)
    const scatter = Math.sqrt(mean((row) => (row.value - value) ** 2))
    const sigma = Math.hypot(
      mean((row) => row.sigma),
      scatter,
    )
    means.push({ line: values[0].line, time: calBpOf(year), value, sigma })
  }
  return means
}

function refuse(name: string, problems: string[]): void {
  if (problems.length === 0) return
  const rest = problems.length > rowsListed ? `; and ${problems.length - rowsListed} more rows` : ''
  throw new Fault('format', 'curve', problems.length, `${name}: ${problems.slice(0, rowsListed).join('; ')}${rest}`)
}
