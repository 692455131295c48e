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

export interface Project {
  schema: number
  id: string
  core: Core
  sections: Section[]
  transects: SectionTransect[]
  spans: SectionSpan[]
  counters: Counter[]
  counts: Count[]
}
