/**
 * A project's contents as tables for other programs: CSV files and the Data Package (version 2) that describes every column.
 *
 * Exports: `projectTables(state)` -> [{ name, path, csv, fields, … }], `dataPackage(state, tables, hashes)`.
 */
import { axisPosition } from '../../worker/core/transect.ts'
import { markAt } from '../document/layerSet.ts'
import { needRecord } from '../document/project.ts'
import type { Project } from '../document/project.ts'
import type { WorkbenchState } from '../document/state.ts'

type Cell = string | number | boolean | null

/** One column, in the words of the Table Schema. */
interface Field {
  name: string
  type: 'string' | 'number' | 'integer' | 'boolean' | 'datetime'
  description: string
}

export interface ProjectTable {
  name: string
  title: string
  path: string
  fields: readonly Field[]
  csv: string
}

const field = (name: string, type: Field['type'], description: string): Field => ({ name, type, description })
const texts = (name: string, description: string) => field(name, 'string', description)
const numbers = (name: string, description: string) => field(name, 'number', description)
const integers = (name: string, description: string) => field(name, 'integer', description)
const flags = (name: string, description: string) => field(name, 'boolean', description)

/**
 * RFC 4180: a cell with a comma, quote or line break is quoted. Text that a spreadsheet would run as a formula gets a leading
 * apostrophe, as in the tables of results.
 */
function csvCell(cell: Cell): string {
  if (typeof cell !== 'string') return cell === null ? '' : String(cell)
  const text = /^\s*[=+\-@]/.test(cell) ? `'${cell}` : cell
  return /[",\r\n]|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text
}

function table(
  name: string,
  title: string,
  fields: readonly Field[],
  rows: readonly (readonly Cell[])[],
): ProjectTable {
  const lines = [fields.map((column) => column.name), ...rows].map((row) => row.map(csvCell).join(','))
  return { name, title, path: `tables/${name}.csv`, fields, csv: `${lines.join('\n')}\n` }
}

/** Depth below the sediment surface of places on a transect, mm to 0.001; null while the section has no scale. */
function depthsOn(project: Project, transectId: string): (position: number) => number | null {
  const transect = needRecord(project, 'transects', transectId)
  const { orientation, scan, scale, depthTop } = needRecord(project, 'sections', transect.section)
  if (!scale) return () => null
  return (position) => {
    const depth = depthTop + axisPosition(transect, orientation, scan, position) * scale.mmPerPx
    return Math.round(depth * 1000) / 1000
  }
}

const time = (milliseconds: number) => new Date(milliseconds).toISOString()

function sections({ project }: WorkbenchState): ProjectTable {
  const fields = [
    texts('section', 'id'),
    texts('name', 'as the section is called'),
    texts('scan_sha256', 'SHA-256 of the scan file'),
    texts('scan_name', 'name of the scan file'),
    integers('width_px', 'width of the scan'),
    integers('height_px', 'height of the scan'),
    texts('axis', 'coordinate of the scan along which the core lies, x or y'),
    texts('young_end', 'low or high end of that coordinate'),
    numbers('mm_per_px', 'scale; empty while not set'),
    texts('scale_basis', 'file, ruler or typed'),
    numbers('depth_top_mm', 'depth of the young end below the sediment surface'),
  ]
  const rows = project.sections.map(({ id, name, scan, orientation, scale, depthTop }) => [
    ...[id, name, scan.sha256, scan.name, scan.width, scan.height, orientation.axis, orientation.young],
    ...[scale?.mmPerPx ?? null, scale?.basis ?? null, depthTop],
  ])
  return table('sections', 'Sections and their scans', fields, rows)
}

function counts({ project }: WorkbenchState): ProjectTable {
  const fields = [
    texts('count', 'id'),
    texts('section', 'id of the section'),
    texts('transect', 'id of the transect'),
    texts('counter', 'name of the counter'),
    integers('pass', '1 for the counter’s first pass over the transect'),
    flags('blind', 'made without sight of earlier counts'),
    numbers('checked_to_mm', 'depth down to which the counter has looked'),
  ]
  const rows = project.counts.map((count) => [
    ...[count.id, needRecord(project, 'transects', count.transect).section, count.transect],
    ...[needRecord(project, 'counters', count.counter).name, count.pass, count.blind],
    depthsOn(project, count.transect)(count.checkedTo),
  ])
  return table('counts', 'Counts: one pass by one counter over one transect', fields, rows)
}

function boundaries({ project, journal }: WorkbenchState): ProjectTable {
  const fields = [
    texts('count', 'id of the count'),
    integers('boundary', 'id of the boundary within its count'),
    numbers('boundary_px', 'distance along the transect from its young end, scan pixels'),
    numbers('depth_mm', 'depth below the sediment surface; empty while the section has no scale'),
    texts('mark', 'certain, doubtful or rejected (a proposal looked at and found to be none)'),
    integers('edit', 'number of the edit that last set it'),
    texts('author', 'who made that edit; empty when its record was lost'),
    field('time', 'datetime', 'when, UTC'),
  ]
  const rows = project.counts.flatMap(({ id, transect, layers }) => {
    const depthAt = depthsOn(project, transect)
    return Array.from(layers.id, (boundary, i): Cell[] => {
      const edit = journal.at(layers.origin[i])
      const position = layers.position[i]
      return [
        ...[id, boundary, position, depthAt(position), markAt(layers, i), layers.origin[i]],
        ...[edit?.author ?? null, edit ? time(edit.time) : null],
      ]
    })
  })
  return table('boundaries', 'Boundaries between varve years', fields, rows)
}

function spans({ project }: WorkbenchState): ProjectTable {
  const fields = [
    texts('span', 'id'),
    texts('transect', 'id of the transect'),
    texts('kind', 'event, unreadable or hiatus'),
    numbers('top_px', 'distance of the young edge along the transect, scan pixels'),
    numbers('base_px', 'distance of the old edge along the transect, scan pixels'),
    numbers('top_mm', 'depth of the young edge'),
    numbers('base_mm', 'depth of the old edge'),
    texts('note', 'remark'),
  ]
  const rows = project.spans.map(({ id, transect, kind, from, to, note }) => {
    const depthAt = depthsOn(project, transect)
    return [id, transect, kind, from, to, depthAt(from), depthAt(to), note]
  })
  return table('spans', 'Event beds, unreadable spans and hiatuses', fields, rows)
}

function dates({ project }: WorkbenchState): ProjectTable {
  const fields = [
    texts('id', 'id'),
    texts('kind', 'year (astronomical), c14 (14C a before 1950) or f14c'),
    texts('label', 'what was dated'),
    numbers('top_mm', 'depth of the top of the sample'),
    numbers('base_mm', 'depth of its base'),
    numbers('value', 'year, age or F14C, by kind'),
    numbers('sigma', 'its standard error'),
    numbers('offset', 'reservoir offset'),
    numbers('offset_sigma', 'standard error of the offset'),
    flags('use', 'takes part in the age model'),
  ]
  const rows = project.dates.map((date) => [
    ...[date.id, date.kind, date.label, date.top, date.base, date.value, date.sigma],
    ...[date.offset, date.offsetSigma, date.use],
  ])
  return table('dates', 'Dates', fields, rows)
}

function notes({ project }: WorkbenchState): ProjectTable {
  const fields = [
    texts('note', 'id'),
    texts('transect', 'id of the transect'),
    numbers('depth_mm', 'depth of the place'),
    texts('text', 'remark'),
  ]
  const rows = project.notes.map(({ id, transect, position, text }) => [
    ...[id, transect, depthsOn(project, transect)(position), text],
  ])
  return table('notes', 'Remarks', fields, rows)
}

function edits({ journal }: WorkbenchState): ProjectTable {
  const fields = [
    integers('edit', 'number'),
    field('time', 'datetime', 'when, UTC'),
    texts('author', 'who'),
    texts('act', 'what kind of act'),
    texts('method', 'method of the computation it came from; empty for a person’s own judgement'),
    texts('input', 'hash of what that computation was given'),
    texts('reverts', 'numbers of the edits an undo or redo took back'),
  ]
  const rows = journal
    .slice(1)
    .map(({ seq, author, userEvent, cause, reverts, ...edit }) => [
      ...[seq, time(edit.time), author, userEvent, cause?.method ?? null, cause?.inputHash ?? null],
      reverts ? `${reverts.from}-${reverts.to}` : null,
    ])
  return table('edits', 'Every edit since the project began', fields, rows)
}

/** All tables of a project, always the same ones in the same order. */
export function projectTables(state: WorkbenchState): ProjectTable[] {
  return [sections, counts, boundaries, spans, dates, notes, edits].map((make) => make(state))
}

/**
 * The descriptor of the tables: Data Package version 2 with a Table Schema for each (datapackage.org).
 * `hashes` holds the SHA-256 of each table by its path.
 */
export function dataPackage(
  { project }: WorkbenchState,
  tables: readonly ProjectTable[],
  hashes: ReadonlyMap<string, string>,
): object {
  const { name, lake } = project.core
  return {
    $schema: 'https://datapackage.org/profiles/2.0/datapackage.json',
    name: 'winterclay-project',
    title: [name, lake].filter((part) => part !== '').join(', ') || 'Varve count',
    resources: tables.map((resource) => ({
      $schema: 'https://datapackage.org/profiles/2.0/dataresource.json',
      name: resource.name,
      type: 'table',
      title: resource.title,
      path: resource.path,
      format: 'csv',
      mediatype: 'text/csv',
      encoding: 'utf-8',
      bytes: new TextEncoder().encode(resource.csv).length,
      hash: `sha256:${hashes.get(resource.path) ?? ''}`,
      schema: { fields: resource.fields, missingValues: [''] },
    })),
  }
}
