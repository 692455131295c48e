import { checkInteger, describe, Fault } from '../check.ts'

/**
 * Comma-separated tables (RFC 4180, but lines end in \n alone): a header, then one line a record; text is UTF-8, numbers
 * have a decimal point and a fixed number of decimals, a value that is not known is an empty cell.
 */

/** The decimals of each kind of number; finer than anything that can be measured, and the same in every table. */
export const decimals = {
  /** Pixels along the path. */
  px: 2,
  /** Depth and thickness in mm: 0.1 micrometres. */
  mm: 4,
  /** Intensity and detrended intensity. */
  intensity: 4,
  probability: 6,
  /** Years that are means or standard deviations. */
  years: 2,
} as const

/** A number with fixed decimals; NaN and infinities, which mean "not known", give an empty cell; -0 is written 0. */
export function numberCell(value: number, places: number): string {
  checkInteger('places', places, 0, 20)
  if (!Number.isFinite(value)) return ''
  const text = value.toFixed(places)
  return Number(text) === 0 && text.startsWith('-') ? text.slice(1) : text
}

/**
 * Text made safe for spreadsheets: a cell that a spreadsheet would run as a formula gets a leading apostrophe, which they
 * hide; control characters other than line ends and tabs become spaces.
 */
export function textCell(text: string): string {
  const clean = Array.from(text, (c) => (c < ' ' && c !== '\n' && c !== '\t' ? ' ' : c)).join('')
  return quoted(/^\s*[=+\-@\t]/.test(clean) ? `'${clean}` : clean)
}

function quoted(text: string): string {
  return /[",\n\r]|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text
}

/** One table; `rows` hold cells made by numberCell and textCell, or plain words that need no protection. */
export function csvText(header: readonly string[], rows: Iterable<readonly string[]>): string {
  const lines = [header.join(',')]
  for (const row of rows) lines.push(row.join(','))
  return `${lines.join('\n')}\n`
}

/** A table read from text: the header's names and the cells below, each row as long as the header. */
export interface CsvTable {
  header: string[]
  rows: string[][]
  /** Line of the file on which each row begins, from 1, [rows]. */
  lines: number[]
}

/** More cells than this in one file are no table of layers. */
const mostCells = 20_000_000

/**
 * Reads a table. `name` is what messages call it. Accepts \n, \r\n and \r line ends, a byte order mark and empty lines;
 * refuses an unclosed quote, text after a closing quote, rows of another length than the header, repeated names.
 */
export function readCsv(text: string, name: string): CsvTable {
  const { records, lines } = splitRecords(text.startsWith('\ufeff') ? text.slice(1) : text, name)
  if (records.length === 0)
    throw new Fault('format', name, text, `${name} is empty; it must start with a line of column names`)
  const header = records[0].map((cell) => cell.trim())
  header.forEach((column, i) => {
    if (header.indexOf(column) !== i) {
      throw new Fault('format', name, column, `${name} has two columns called ${describe(column)}; rename one of them`)
    }
  })
  records.forEach((record, i) => {
    if (record.length !== header.length) {
      const message = `${name}, line ${lines[i]}, has ${record.length} cells; its header has ${header.length} columns`
      throw new Fault('format', name, record.length, message)
    }
  })
  return { header, rows: records.slice(1), lines: lines.slice(1) }
}

/** One cell of `text` from `at`, and where it ends; a quoted cell may hold commas, line ends and doubled quotes. */
function cellAt(text: string, at: number, ends: RegExp): { cell: string; end: number } | 'not closed' {
  if (text[at] !== '"') {
    ends.lastIndex = at
    const end = ends.exec(text)?.index ?? text.length
    return { cell: text.slice(at, end), end }
  }
  let from = at + 1
  for (;;) {
    const quote = text.indexOf('"', from)
    if (quote < 0) return 'not closed'
    if (text[quote + 1] !== '"') return { cell: text.slice(at + 1, quote).replaceAll('""', '"'), end: quote + 1 }
    from = quote + 2
  }
}

function splitRecords(text: string, name: string): { records: string[][]; lines: number[] } {
  const records: string[][] = []
  const lines: number[] = []
  const ends = /[",\n\r]/g
  let record: string[] = []
  let line = 1
  let startLine = 1
  let at = 0
  let cells = 0
  while (at <= text.length) {
    const found = cellAt(text, at, ends)
    if (found === 'not closed') {
      throw new Fault('format', name, text.slice(at), `${name}, line ${line}, has a quote that is never closed`)
    }
    const { cell, end } = found
    const next = text[end]
    if (end < text.length && next !== ',' && next !== '\n' && next !== '\r') {
      const what =
        text[at] === '"' ? 'text after a closing quote' : 'a quote inside a cell that does not start with one'
      throw new Fault('format', name, cell, `${name}, line ${line}, has ${what}`)
    }
    record.push(cell)
    if (++cells > mostCells) throw new Fault('too-large', name, cells, `${name} has more than ${mostCells} cells`)
    line += cell.match(/\r\n|\r|\n/g)?.length ?? 0
    at = end + (text.startsWith('\r\n', end) ? 2 : 1)
    if (next === ',') continue
    if (record.length > 1 || record[0].trim() !== '') {
      records.push(record)
      lines.push(startLine)
    }
    record = []
    line++
    startLine = line
  }
  return { records, lines }
}
