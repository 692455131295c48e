import { describe, Fault } from '../check.ts'
import { readCsv } from './csv.ts'
import { dateKinds } from './dates.ts'
import type { CoreDate, DateKind } from './dates.ts'
import { errorModelNamed } from './errorModel.ts'
import { columnOf, RowReader } from './rowProblems.ts'
import type { RowProblem } from './rowProblems.ts'

/** A date with its place in its file. */
export interface DateRow extends CoreDate {
  line: number
}

/** A table of dates, as far as it could be read: rows without a problem, and the problems of the others. */
export interface DatesTable {
  rows: DateRow[]
  problems: RowProblem[]
}

/** Columns that a table may have beside those it must have. */
const optional = ['base_mm', 'offset', 'offset_sigma', 'shape', 'model', 'curve'] as const

/**
 * Reads a table of dates: id,kind,top_mm,base_mm,value,sigma,offset,offset_sigma, and if wanted shape (normal or uniform,
 * for years), model (normal, student-t or mixture) and curve (the name of a curve). An empty base_mm is top_mm, an empty
 * offset 0. Nothing is thrown for a bad row: every one is named with its line.
 */
export function readDatesTable(text: string, name: string): DatesTable {
  const table = readCsv(text, name)
  const [id, kind, top, value, sigma] = ['id', 'kind', 'top_mm', 'value', 'sigma'].map((column) =>
    columnOf(table, column, name),
  )
  const [base, offset, offsetSigma, shape, model, curve] = optional.map((column) => table.header.indexOf(column))
  const places = { id, kind, top, value, sigma, base, offset, offsetSigma, shape, model, curve }
  const problems: RowProblem[] = []
  const rows: DateRow[] = []
  const seen = new Map<string, number>()
  for (let i = 0; i < table.rows.length; i++) {
    const before = problems.length
    const line = table.lines[i]
    const row = dateOf(new RowReader(table.rows[i], line, problems), places, line, seen)
    if (problems.length === before) rows.push(row)
  }
  return { rows, problems }
}

type Places = Record<
  'id' | 'kind' | 'top' | 'value' | 'sigma' | 'base' | 'offset' | 'offsetSigma' | 'shape' | 'model' | 'curve',
  number
>

function dateOf(row: RowReader, places: Places, line: number, seen: Map<string, number>): DateRow {
  const id = idOf(row, places.id, line, seen)
  const kind = kindOf(row, places.kind)
  const top = row.number(places.top, 'top_mm', null)
  const base = row.number(places.base, 'base_mm', top)
  if (top > base) row.wrong('top_mm', `top_mm ${top} lies below base_mm ${base}; are they swapped?`)
  const value = row.number(places.value, 'value', null)
  const sigma = row.number(places.sigma, 'sigma', null)
  const offset = row.number(places.offset, 'offset', 0)
  const offsetSigma = row.number(places.offsetSigma, 'offset_sigma', 0)
  if (sigma < 0) row.wrong('sigma', `sigma must not be negative; it is ${sigma}`)
  if (sigma === 0 && kind !== 'year') row.wrong('sigma', `sigma of a ${kind} date must be greater than 0`)
  if (offsetSigma < 0) row.wrong('offset_sigma', `offset_sigma must not be negative; it is ${offsetSigma}`)
  if (kind === 'f14c' && !(value > 0))
    row.wrong('value', `value of an f14c date must be greater than 0; it is ${value}`)
  const date: DateRow = { line, id, kind, top, base, value, sigma, offset, offsetSigma }
  return { ...date, ...wordsOf(row, places, kind) }
}

function idOf(row: RowReader, place: number, line: number, seen: Map<string, number>): string {
  const id = row.text(place)
  if (id === '') row.wrong('id', 'id is missing')
  else if (seen.has(id)) row.wrong('id', `the id ${describe(id)} stands already in line ${seen.get(id) ?? 0}`)
  seen.set(id, line)
  return id
}

function kindOf(row: RowReader, place: number): DateKind {
  const kind = row.text(place)
  const known = dateKinds.find((one) => one === kind)
  if (known === undefined) row.wrong('kind', `kind must be one of ${dateKinds.join(', ')}; it is ${describe(kind)}`)
  return known ?? 'year'
}

/** Shape, model and curve, where the table names them. */
function wordsOf(row: RowReader, places: Places, kind: DateKind): Partial<DateRow> {
  const words: Partial<DateRow> = {}
  const shape = row.text(places.shape)
  if (shape === 'uniform' && kind === 'year') words.shape = shape
  else if (shape !== '' && shape !== 'normal') {
    row.wrong('shape', `shape must be normal, or uniform for a year; it is ${describe(shape)}`)
  }
  const model = row.text(places.model)
  if (model !== '') {
    try {
      words.model = errorModelNamed(model)
    } catch (error) {
      if (!(error instanceof Fault)) throw error
      row.wrong('model', error.message)
    }
  }
  const curve = row.text(places.curve)
  if (curve !== '') words.curve = curve
  return words
}
