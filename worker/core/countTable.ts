import { Fault } from '../check.ts'
import { positionErrors } from './counterMarks.ts'
import type { RowError } from './counterMarks.ts'
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
  const errors = positionErrors(depth, columns.depth).map((error) => ({
    ...error,
    value: table.rows[error.row - 1][depthAt],
    row: table.lines[error.row - 1],
  }))
  const rows: CountTableRow[] = []
  table.rows.forEach((row, i) => {
    const mark = markAt < 0 ? 'certain' : row[markAt].trim().toLowerCase()
    if (mark === 'certain' || mark === 'doubtful') rows.push({ line: table.lines[i], depthMm: depth[i], mark })
    else {
      errors.push({
        row: table.lines[i],
        column: columns.mark ?? '',
        value: row[markAt],
        message: `${columns.mark ?? ''} must be certain or doubtful`,
      })
    }
  })
  return { header: table.header, rows, errors: errors.sort((a, b) => a.row - b.row) }
}

/** A number as a table gives it; an empty cell and words are NaN, so that the row is refused and not read as 0. */
function depthOf(cell: string): number {
  return cell.trim() === '' ? NaN : Number(cell)
}

function columnIn(header: readonly string[], column: string, name: string): number {
  const at = header.indexOf(column)
  if (at >= 0) return at
  throw new Fault('format', name, column, `${name} has no column ${column}; it has ${header.join(', ')}`)
}
