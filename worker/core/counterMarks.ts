/** One counter's boundaries as the comparison takes them: checked once, here, row by row. */
import { checkFinite, Fault } from '../check.ts'

/** Columns of equal length [marks], sorted downcore, in one unit for all counters (mm of depth or path pixels). */
export interface CounterMarks {
  name: string
  position: Float64Array
  /** 1 where the counter doubted the boundary, 0 where they were certain. */
  doubtful: Uint8Array
  /** The stretch the counter looked at; null: from their first mark to their last, and beyond to the ends of the others. */
  range: { from: number; to: number } | null
}

/** What is wrong with one row of a count, in words. Row 1 is the first mark. */
export interface RowError {
  row: number
  column: string
  value: string
  message: string
}

/**
 * Positions must be finite and rise from row to row; each row is compared with the last good one before it. `rows`: the
 * number by which each row is known, [rows]; else from 1.
 */
export function positionErrors(
  position: ArrayLike<number>,
  column = 'position',
  rows: ArrayLike<number> | null = null,
): RowError[] {
  const errors: RowError[] = []
  let last = -Infinity
  let lastRow = 0
  for (let i = 0; i < position.length; i++) {
    const value = position[i]
    const problem = positionProblem(value, last, lastRow)
    const row = rows ? rows[i] : i + 1
    if (problem) errors.push({ row, column, value: String(value), message: `${column} ${problem}` })
    // A row that runs backwards becomes the new start, so that one wrong depth is one error and not a thousand.
    if (Number.isFinite(value)) {
      last = value
      lastRow = row
    }
  }
  return errors
}

function positionProblem(value: number, last: number, lastRow: number): string | null {
  if (!Number.isFinite(value)) return `must be a finite number; it is ${value}`
  if (value === last) return `${value} is given twice, as in row ${lastRow}; remove one of them`
  if (value < last) return `${value} lies above ${last} in row ${lastRow}; rows must run downcore`
  return null
}

/** The first error and how many more there are, as one line. */
export function firstError(source: string, errors: readonly RowError[]): string {
  const [first] = errors
  const more = errors.length > 1 ? `; ${errors.length - 1} more row${errors.length > 2 ? 's are' : ' is'} wrong` : ''
  return `${source}, row ${first.row}: ${first.message}${more}`
}

/** Throws a Fault on the first bad row of a count, naming the counter, the row and how many more rows are wrong. */
export function checkCounterMarks(marks: CounterMarks): void {
  const { name, position, doubtful, range } = marks
  if (position.length === 0) {
    throw new Fault(
      'argument',
      `count of ${name}`,
      0,
      `the count of ${name} holds no boundary; leave it out of the comparison`,
    )
  }
  if (doubtful.length !== position.length) {
    throw new Fault(
      'argument',
      `count of ${name}`,
      doubtful.length,
      `the count of ${name} must mark each of its ${position.length} boundaries; it marks ${doubtful.length}`,
    )
  }
  const errors = positionErrors(position)
  if (errors.length > 0)
    throw new Fault('argument', 'position', errors[0].value, firstError(`count of ${name}`, errors))
  if (!range) return
  checkFinite(`range of ${name}`, range.from)
  checkFinite(`range of ${name}`, range.to)
  if (!(range.from <= position[0] && position[position.length - 1] <= range.to)) {
    const stated = `${range.from} to ${range.to}`
    throw new Fault(
      'argument',
      `range of ${name}`,
      stated,
      `the range of ${name}, ${stated}, must hold all of the boundaries, ${position[0]} to ${position[position.length - 1]}`,
    )
  }
}
