/**
 * The form of every record of a project in files and steps, and the two ways between a record and its JSON
 * (only a count differs: its boundaries are typed columns in memory and plain lists outside).
 *
 * Exports: `StoredRecords` (records as JSON), `recordFields` and `coreFields` (readers field by field),
 * `readStored(collection)`, `readColumns`, `storeRecord(collection, record)`, `restoreRecord(collection, stored)`.
 */
import { Fault } from '../../worker/check.ts'
import type { Point } from '../../worker/units.ts'
import { above, finite, flag, identifier, listOf, nullable, oneOf, recordOf, refuse, sha256Text, text } from './form.ts'
import { whole, within } from './form.ts'
import type { Reader } from './form.ts'
import { columnsOf, layersFromColumns, marks } from './layerSet.ts'
import type { LayerColumns } from './layerSet.ts'
import { dateKinds } from './project.ts'
import type { Collection, Core, CoreDate, Count, Counter, Note, Records, Scale, ScanReference } from './project.ts'
import type { Section, SectionSpan, SectionTransect } from './project.ts'
import { readRecipe } from './recipeForm.ts'

/** A count as JSON. */
export type StoredCount = Omit<Count, 'layers'> & { layers: LayerColumns }
/** What each collection holds, as JSON. */
export type StoredRecords = Omit<Records, 'counts'> & { counts: StoredCount }
export type StoredRecord<C extends Collection = Collection> = StoredRecords[C]

/** A reader of plain numbers used for a branded unit. */
function unit<T extends number>(read: Reader<number>): Reader<T> {
  return read as Reader<T>
}

const name = text(200)
/** Nothing on a scan or along a path lies further out than this, pixels. */
const farthest = 1e7
const pathDistance = within(0, farthest)
const largestSequence = 0xffffffff

export const coreFields: { readonly [K in keyof Core]: Reader<Core[K]> } = {
  name,
  lake: name,
  coringYear: nullable(unit(whole(-100_000, 3000))),
  topIntact: flag,
  topYearOpen: flag,
}

const readScanReference = recordOf<ScanReference>({
  sha256: sha256Text,
  name: text(1000),
  bytes: whole(0, Number.MAX_SAFE_INTEGER),
  width: whole(1, farthest),
  height: whole(1, farthest),
  channels: oneOf(1, 2, 3, 4),
  bits: oneOf(8, 16),
})

const readPoint = recordOf<Point>({ x: unit(within(-farthest, farthest)), y: unit(within(-farthest, farthest)) })

/** Columns of equal length; order and spacing are checked when they are placed. */
export const readColumns: Reader<LayerColumns> = (value, at) => {
  const columns = readLists(value, at)
  for (const key of ['position', 'mark', 'origin'] as const) {
    if (columns[key].length !== columns.id.length) {
      refuse(`${at}.${key}`, columns[key], `as long as ${at}.id, ${columns.id.length}`)
    }
  }
  return columns
}

const mostLayers = 2_000_000
const readLists = recordOf<LayerColumns>({
  id: listOf(whole(1, largestSequence), mostLayers),
  position: listOf(pathDistance, mostLayers),
  mark: listOf(oneOf(...marks), mostLayers),
  origin: listOf(whole(0, largestSequence), mostLayers),
})

type Fields<T> = { readonly [K in keyof T]-?: Reader<T[K]> }

const sectionFields: Fields<Section> = {
  id: identifier,
  name,
  scan: readScanReference,
  orientation: recordOf<Section['orientation']>({ axis: oneOf('x', 'y'), young: oneOf('low', 'high') }),
  scale: nullable(recordOf<Scale>({ mmPerPx: above(0, 1e6), basis: oneOf('file', 'ruler', 'typed') })),
  depthTop: unit(within(-1e7, 1e7)),
  recipe: readRecipe,
}
const transectFields: Fields<SectionTransect> = {
  id: identifier,
  section: identifier,
  points: listOf(readPoint, 10_000),
  width: unit(above(0, farthest)),
  tilt: nullable(within(-Math.PI / 2, Math.PI / 2)),
  masks: listOf(listOf(readPoint, 10_000), 10_000),
}
const spanFields: Fields<SectionSpan> = {
  id: identifier,
  transect: identifier,
  from: pathDistance,
  to: pathDistance,
  kind: oneOf('event', 'unreadable', 'hiatus'),
  note: text(2000),
}
const counterFields: Fields<Counter> = { id: identifier, name }
const countFields: Fields<StoredCount> = {
  id: identifier,
  transect: identifier,
  counter: identifier,
  pass: whole(1, 1000),
  blind: flag,
  checkedTo: unit(pathDistance),
  layers: readColumns,
}
const dateFields: Fields<CoreDate> = {
  id: identifier,
  kind: oneOf(...dateKinds),
  label: name,
  top: unit(within(-1e7, 1e7)),
  base: unit(within(-1e7, 1e7)),
  value: within(-1e6, 1e6),
  sigma: within(0, 1e6),
  offset: finite,
  offsetSigma: within(0, 1e6),
  use: flag,
}
const noteFields: Fields<Note> = {
  id: identifier,
  transect: identifier,
  position: unit(pathDistance),
  text: text(5000),
}

export const recordFields: { readonly [C in Collection]: Fields<StoredRecords[C]> } = {
  sections: sectionFields,
  transects: transectFields,
  spans: spanFields,
  counters: counterFields,
  counts: countFields,
  dates: dateFields,
  notes: noteFields,
}

/** What must hold between the fields of one record, whatever way it came about. */
const coherence: { readonly [C in Collection]?: (record: StoredRecords[C], at: string) => void } = {
  transects: ({ points }, at) => {
    if (points.length < 2) refuse(`${at}.points`, points, 'a path of at least 2 points')
    points.forEach((point, i) => {
      if (i > 0 && point.x === points[i - 1].x && point.y === points[i - 1].y) {
        refuse(`${at}.points[${i}]`, `${point.x}, ${point.y}`, 'another place than the point before it')
      }
    })
  },
  spans: ({ from, to }, at) => {
    if (!(to >= from)) refuse(`${at}.to`, to, `at or below from, ${from}`)
  },
  dates: ({ top, base, sigma, kind }, at) => {
    if (!(base >= top)) refuse(`${at}.base`, base, `at or below top, ${top}`)
    if (kind !== 'year' && !(sigma > 0)) refuse(`${at}.sigma`, sigma, 'greater than 0')
  },
}

/** Checks what must hold between the fields of a record; throws a Fault. */
export function checkCoherent<C extends Collection>(collection: C, record: StoredRecords[C], at: string): void {
  coherence[collection]?.(record, at)
}

export function readStored<C extends Collection>(collection: C): Reader<StoredRecords[C]> {
  const read = recordOf<StoredRecords[C]>(recordFields[collection])
  return (value, at) => {
    const record = read(value, at)
    checkCoherent(collection, record, at)
    return record
  }
}

export function storeRecord(collection: Collection, record: Records[Collection]): StoredRecord {
  if (collection !== 'counts') return record as Exclude<Records[Collection], Count>
  const count = record as Count
  return { ...count, layers: columnsOf(count.layers) }
}

/** Throws a Fault naming `at` when a count's columns are out of order or too close. */
export function restoreRecord(collection: Collection, stored: StoredRecord, at: string): Records[Collection] {
  if (collection !== 'counts') return stored as Exclude<StoredRecord, StoredCount>
  const count = stored as StoredCount
  try {
    return { ...count, layers: layersFromColumns(count.layers) }
  } catch (error) {
    if (error instanceof Fault) throw new Fault('format', `${at}.layers`, error.value, `${at}.layers: ${error.message}`)
    throw error
  }
}
