import { describe, Fault } from '../check.ts'
import { firstError, positionErrors } from './counterMarks.ts'
import type { CounterMarks, RowError } from './counterMarks.ts'
import { readCsv } from './csv.ts'

/** One boundary of a count that came as a table. */
export interface CountTableRow {
  /** Line of the file, from 1. */
  line: number
  depthMm: number
  mark: 'certain' | 'doubtful'
}

/** A count as it was read from a table: whole only where `errors` is empty. */
export interface CountTable {
  header: string[]
  rows: CountTableRow[]
  /** What is wrong, by line of the file, in the order of the file. */
  errors: RowError[]
}

export interface CountColumns {
  depth: string
  /** Without it every boundary is certain. */
  mark: string | null
}

export const usualColumns: CountColumns = { depth: 'depth_mm', mark: 'mark' }

/** More boundaries than this in one count are no count of a core. */
const mostRows = 1_000_000

/**
 * Reads a count from CSV text. Depths in mm below the sediment surface, rising from row to row; marks are `certain` or
 * `doubtful`. Every bad row is listed by its line: no number, NaN, a depth that repeats or runs back, an unknown mark.
 * Throws a Fault where the text is no table or lacks a column.
 */
export function readCountTable(text: string, name: string, columns: CountColumns = usualColumns): CountTable {
  const table = readCsv(text, name)
  const depthAt = columnIn(table.header, columns.depth, name)
  const markAt = columns.mark === null ? -1 : columnIn(table.header, columns.mark, name)
  if (table.rows.length > mostRows) {
    throw new Fault(
      'too-large',
      name,
      table.rows.length,
      `${name} has ${table.rows.length} rows; a count may have ${mostRows}`,
    )
  }
  const depth = Float64Array.from(table.rows, (row) => depthOf(row[depthAt]))
  const cellOn = new Map(table.lines.map((line, i) => [line, table.rows[i][depthAt]]))
  const errors = positionErrors(depth, columns.depth, table.lines).map((error) => {
    const cell = cellOn.get(error.row) ?? ''
    return {
      ...error,
      value: cell,
      message: Number.isFinite(depthOf(cell)) ? error.message : noNumber(columns.depth, cell),
    }
  })
  const rows: CountTableRow[] = []
  table.rows.forEach((row, i) => {
    const mark = markAt < 0 ? 'certain' : row[markAt].trim().toLowerCase()
    if (mark === 'certain' || mark === 'doubtful') rows.push({ line: table.lines[i], depthMm: depth[i], mark })
    else {
      errors.push({
        row: table.lines[i],
        column: columns.mark ?? '',
        value: row[markAt],
        message: `${columns.mark ?? ''} must be certain or doubtful; it is ${describe(row[markAt])}`,
      })
    }
  })
  return { header: table.header, rows, errors: errors.sort((a, b) => a.row - b.row) }
}

/** A number as a table gives it; an empty cell and words are NaN, so that the row is refused and not read as 0. */
function depthOf(cell: string): number {
  return cell.trim() === '' ? NaN : Number(cell)
}

function noNumber(column: string, cell: string): string {
  return cell.trim() === '' ? `${column} is empty` : `${column} must be a finite number; it is ${describe(cell)}`
}

/**
 * A table as a count to be compared, under the counter's name. A table with a bad row is refused in one line: the first bad
 * row, by its line in the file, and how many more there are.
 */
export function marksOfTable({ rows, errors }: CountTable, file: string, counter: string): CounterMarks {
  if (errors.length > 0) {
    const byRow = [...new Map(errors.toReversed().map((error) => [error.row, error])).values()].toReversed()
    throw new Fault('format', errors[0].column, errors[0].value, firstError(file, byRow))
  }
  if (rows.length === 0) {
    throw new Fault('format', file, 0, `${file} has no rows below its header; a count needs at least one boundary`)
  }
  return {
    name: counter,
    position: Float64Array.from(rows, ({ depthMm }) => depthMm),
    doubtful: Uint8Array.from(rows, ({ mark }) => (mark === 'doubtful' ? 1 : 0)),
    range: null,
  }
}

function columnIn(header: readonly string[], column: string, name: string): number {
  const at = header.indexOf(column)
  if (at >= 0) return at
  throw new Fault('format', name, column, `${name} has no column ${column}; it has ${header.join(', ')}`)
}
