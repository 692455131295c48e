/**
 * What a project holds. Observations only: pixels along transects of hashed scans; millimetres and years are derived.
 *
 * Exports: the record types, `collections`, `emptyProject(id)`, `findRecord(project, collection, id)` (undefined when
 * absent), `needRecord(project, collection, id)` (throws a Fault when absent), `freshId(project, collection)`.
 * Reading and writing JSON: parseProject.ts.
 */
import { Fault } from '../../worker/check.ts'
import type { Span } from '../../worker/core/ladder.ts'
import type { Recipe } from '../../worker/core/recipe.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import type { Transect } from '../../worker/core/transect.ts'
import type { CalYear, Millimetres, PathPixels } from '../../worker/units.ts'
import type { LayerSet } from './layerSet.ts'

/** Version of this form of the document; migrations.ts brings older ones forward. */
export const currentSchema = 1

/** The scan file a section was made from; the hash decides, the name only helps to find it. */
export interface ScanReference {
  sha256: string
  name: string
  bytes: number
  width: number
  height: number
  channels: 1 | 2 | 3 | 4
  bits: 8 | 16
}

/** Scale along the core and where it came from; a scale from the file counts only once the user has accepted it. */
export interface Scale {
  mmPerPx: number
  basis: 'file' | 'ruler' | 'typed'
}

export interface Core {
  name: string
  lake: string
  /** Calendar year in which the core was taken; null: unknown. */
  coringYear: CalYear | null
  /** The sediment surface is the top of the first section, undisturbed, so that the count can be tied to coringYear. */
  topIntact: boolean
  /** The youngest, still open couplet belongs to the coring year and is left out of the count (common practice, no source). */
  topYearOpen: boolean
}

export interface Section {
  id: string
  name: string
  scan: ScanReference
  orientation: Orientation
  scale: Scale | null
  /** Depth of the section's young end below the sediment surface. */
  depthTop: Millimetres
  recipe: Recipe
}

/** A transect of a section; counts are made along it. */
export interface SectionTransect extends Transect {
  id: string
  section: string
}

/** An event bed, unreadable stretch or hiatus, in path pixels of its transect. */
export interface SectionSpan extends Span {
  id: string
  transect: string
  note: string
}

export interface Counter {
  id: string
  name: string
}

/** One pass by one counter over one section. */
export interface Count {
  id: string
  transect: string
  counter: string
  /** 1 for the counter's first pass over this transect, 2 for the second. */
  pass: number
  /** All earlier counts are hidden while this one is made. */
  blind: boolean
  /** The counter has looked at everything younger than this, path pixels. */
  checkedTo: PathPixels
  layers: LayerSet
}

/** `year`: a level of known calendar year; `c14`: a radiocarbon age in 14C a before 1950; `f14c`: a post-bomb F14C. */
export const dateKinds = ['year', 'c14', 'f14c'] as const
export type DateKind = (typeof dateKinds)[number]

/** A dated level or sample of the core. */
export interface CoreDate {
  id: string
  kind: DateKind
  label: string
  /** Depth range of the sample below the sediment surface; equal for a level. */
  top: Millimetres
  base: Millimetres
  /** Astronomical year, 14C a before 1950, or F14C, by kind; sigma, offset and offsetSigma in the same unit. */
  value: number
  sigma: number
  /** Reservoir offset, subtracted from a radiocarbon age before calibration, and its error. */
  offset: number
  offsetSigma: number
  /** Whether it takes part in the age model. */
  use: boolean
}

/** A remark at a place on a transect. */
export interface Note {
  id: string
  transect: string
  position: PathPixels
  text: string
}

/** The collections of a project and what each holds. */
export interface Records {
  sections: Section
  transects: SectionTransect
  spans: SectionSpan
  counters: Counter
  counts: Count
  dates: CoreDate
  notes: Note
}
export type Collection = keyof Records

/** All collections, owners before what refers to them. */
export const collections = ['sections', 'transects', 'spans', 'counters', 'counts', 'dates', 'notes'] as const

/** Which other record a field of a record names. */
export const references: { readonly [C in Collection]: Readonly<Record<string, Collection>> } = {
  sections: {},
  transects: { section: 'sections' },
  spans: { transect: 'transects' },
  counters: {},
  counts: { transect: 'transects', counter: 'counters' },
  dates: {},
  notes: { transect: 'transects' },
}

/** Never changed in place: an edit makes a new project that shares what it left alone. */
export interface Project {
  readonly schema: number
  readonly id: string
  readonly core: Readonly<Core>
  readonly sections: readonly Section[]
  readonly transects: readonly SectionTransect[]
  readonly spans: readonly SectionSpan[]
  readonly counters: readonly Counter[]
  readonly counts: readonly Count[]
  readonly dates: readonly CoreDate[]
  readonly notes: readonly Note[]
}

export function emptyProject(id: string): Project {
  return {
    schema: currentSchema,
    id,
    core: { name: '', lake: '', coringYear: null, topIntact: false, topYearOpen: true },
    sections: [],
    transects: [],
    spans: [],
    counters: [],
    counts: [],
    dates: [],
    notes: [],
  }
}

/** The list of one collection, typed by its name. */
export function recordsOf<C extends Collection>(project: Project, collection: C): readonly Records[C][] {
  return project[collection] as readonly Records[Collection][] as readonly Records[C][]
}

export function findRecord<C extends Collection>(project: Project, collection: C, id: string): Records[C] | undefined {
  return recordsOf(project, collection).find((record) => record.id === id)
}

const singular: Record<Collection, string> = {
  sections: 'section',
  transects: 'transect',
  spans: 'span',
  counters: 'counter',
  counts: 'count',
  dates: 'date',
  notes: 'note',
}

/** What one record of a collection is called in a message. */
export function nameOfRecord(collection: Collection): string {
  return singular[collection]
}

export function needRecord<C extends Collection>(project: Project, collection: C, id: string): Records[C] {
  const record = findRecord(project, collection, id)
  if (!record) {
    throw new Fault('conflict', singular[collection], id, `the project has no ${singular[collection]} "${id}"`)
  }
  return record
}

/** An id no record of the collection bears: its name and the next number. */
export function freshId(project: Project, collection: Collection): string {
  const pattern = new RegExp(`^${singular[collection]}-([0-9]{1,9})$`)
  let largest = 0
  for (const { id } of recordsOf(project, collection)) {
    const number = Number(pattern.exec(id)?.[1] ?? 0)
    if (number > largest) largest = number
  }
  return `${singular[collection]}-${largest + 1}`
}
