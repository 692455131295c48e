import { describe, Fault } from '../check.ts'
import type { CsvTable } from './csv.ts'

/** What is wrong with one row of a table: `line` of the file, from 1. */
export interface RowProblem {
  line: number
  column: string
  /** What, the value received, and what to do; without the line. */
  message: string
}

/** How many problems one message lists before it only counts them. */
const listed = 5

/** Refuses a table for its rows, in one line. */
export function refuseRows(name: string, problems: readonly RowProblem[]): void {
  if (problems.length === 0) return
  const words = problems.slice(0, listed).map(({ line, message }) => `line ${line}: ${message}`)
  const rest = problems.length > listed ? `; and ${problems.length - listed} more` : ''
  throw new Fault(
    'format',
    problems[0].column,
    problems.length,
    `${name}, ${words.join('; ')}${rest}; nothing was changed`,
  )
}

/** The place of a column a table must have. */
export function columnOf(table: CsvTable, column: string, name: string): number {
  const at = table.header.indexOf(column)
  if (at >= 0) return at
  const message = `${name} has no column ${column}; its columns are ${table.header.join(', ')}`
  throw new Fault('format', column, table.header, message)
}

/** Plain or exponent notation with a decimal point; a typographic minus is read as a minus. */
const plainNumber = /^[+\-\u2212]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i

/** Reads the cells of one row; problems are collected, and the value is then NaN. */
export class RowReader {
  constructor(
    private readonly cells: readonly string[],
    private readonly line: number,
    private readonly problems: RowProblem[],
  ) {}

  text(place: number): string {
    return place < 0 ? '' : this.cells[place].trim()
  }

  /** A number; `empty` is what an empty cell (or a column that is not there) means; null: it must not be empty. */
  number(place: number, column: string, empty: number | null): number {
    const text = this.text(place)
    if (text === '') return empty ?? this.wrong(column, `${column} is missing`)
    const value = plainNumber.test(text) ? Number(text.replace('\u2212', '-')) : NaN
    return Number.isFinite(value) ? value : this.wrong(column, `${column} must be a number; it is ${describe(text)}`)
  }

  wrong(column: string, message: string): number {
    this.problems.push({ line: this.line, column, message })
    return NaN
  }
}
