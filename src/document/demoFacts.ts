import type { Span } from '../../worker/core/ladder.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import type { Transect } from '../../worker/core/transect.ts'

/**
 * What is known of the demo core beside its picture: the content of `demo.json`, which lies next to the demo scans.
 * Everything is invented. Lengths in millimetres or in pixels of the scan, years astronomical (equal to CE here).
 */
export interface DemoFacts {
  core: DemoCore
  section: DemoSection
  /** Event beds, in path pixels of the section's transect. */
  spans: (Span & { note: string })[]
  /** One count for each counter, all along the section's transect. */
  counts: DemoCount[]
  dates: DemoDate[]
  /** Further scans of the same core that may be opened beside the section. */
  companions: DemoCompanion[]
}

export interface DemoCore {
  name: string
  lake: string
  coringYear: number
  /** The scan begins at the undisturbed sediment surface. */
  topIntact: boolean
  /** The youngest couplet was still open when the core was taken and is not counted. */
  topYearOpen: boolean
}

export interface DemoSection {
  name: string
  /** The scan's file name, in the same folder as `demo.json`. */
  file: string
  orientation: Orientation
  mmPerPx: number
  /** Depth of the young end below the sediment surface, mm. */
  depthTop: number
  /** Straight down the middle of the core from the young edge of the scan to its old edge. */
  transect: Transect
}

/** One counter's boundaries: the sharp tops of the winter clays, sorted downcore; columns of equal length. */
export interface DemoCount {
  counter: string
  /** Path pixels. */
  position: number[]
  mark: ('certain' | 'doubtful')[]
}

/** A date of a sample between two depths: a known year, or a conventional radiocarbon age before 1950. */
export interface DemoDate {
  id: string
  kind: 'year' | 'c14'
  topMm: number
  baseMm: number
  value: number
  sigma: number
  note: string
}

export interface DemoCompanion {
  name: string
  file: string
  note: string
  orientation: Orientation
  mmPerPx: number
  /** Depth of the young end below the sediment surface, mm. */
  depthTop: number
}
