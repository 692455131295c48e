import type { Span } from '../../../worker/core/ladder.ts'
import type { Orientation } from '../../../worker/core/scan.ts'
import type { ScanLevel } from '../../../worker/reading/scanFile.ts'
import type { MinMaxPyramid } from '../minMaxPyramid.ts'
import type { PathAxis } from '../pathAxis.ts'
import type { Picture } from '../surface.ts'
import type { Viewport } from '../viewport.ts'

/*
 * What the painters beside the core are given. All positions are axis pixels (scan pixels along the core axis from the
 * young end); `PathAxis` turns path pixels into them. Columns are sorted downcore.
 */

/** One count's boundaries; both columns [boundaries]. */
export interface MarkColumn {
  readonly position: Float64Array
  /** Index into the document's `marks`: certain, doubtful, rejected. */
  readonly mark: Uint8Array
}

/** Candidates not yet looked at; all columns [proposals]. */
export interface ProposalColumn {
  readonly position: Float64Array
  /** 0 to 1. */
  readonly probability: Float64Array
  /** 1 where the most probable ladder holds it. */
  readonly chosen: Uint8Array
}

/** A span in axis pixels. */
export type StripSpan = Pick<Span, 'from' | 'to' | 'kind'>

export interface DepthAxisData {
  viewport: Viewport
  /** null: the scale is not known and the axis counts scan pixels. */
  mmPerPx: number | null
  /** Depth of the young end, mm. */
  depthTop: number
  /** Where the depth under the pointer is shown, axis pixels. */
  pointer?: number | null
}

/** The part of the core's breadth a column shows. Across pixels run left to right when the core stands upright. */
export interface Across {
  /** Across position at the middle of the column. */
  centre: number
  /** CSS pixels per across pixel. */
  scale: number
}

/** The scan's own pixel grid, as the file gives it. */
export interface TileGrid {
  /** Identity of the scan and of how it is displayed (contrast, channel): the beginning of each tile's key. */
  scan: string
  width: number
  height: number
  levels: readonly ScanLevel[]
  orientation: Orientation
}

export interface ScanData {
  viewport: Viewport
  across: Across
  grid: TileGrid
  /** Tile bitmaps, upright, as far as they have arrived; see `tilesNeeded` for the keys. */
  tile: (key: string) => Picture | undefined
}

/** A transect turned upright: `axis` downcore, `across` to the right. */
export interface UprightTransect {
  points: readonly { axis: number; across: number }[]
  width: number
}

/** A place at which a transect can be grasped. `segment` is the path between point `index` and the next. */
export type TransectHandle =
  | { kind: 'point'; index: number }
  | { kind: 'edge'; side: 'left' | 'right'; index: number }
  | { kind: 'segment'; index: number }

export interface TransectData {
  viewport: Viewport
  across: Across
  transect: UprightTransect
  /** Shows the handles. */
  editable: boolean
  /** The handle under the pointer or being dragged. */
  active: TransectHandle | null
}

/** Boundaries drawn on the sediment itself, across the transect's band. */
export interface ScanMarksData {
  viewport: Viewport
  across: Across
  transect: UprightTransect
  boundaries: MarkColumn | null
  proposals: ProposalColumn | null
  spans: readonly StripSpan[]
  /** Axis position of the cursor: the boundary or proposal being judged. */
  cursor: number | null
  /** Slope of the laminae to the right across the core, axis pixels per across pixel, at an axis position. */
  slopeAt?: (axis: number) => number
}

/** The ladder column: one count's boundaries with year numbers, proposals still open, spans. */
export interface LadderData {
  viewport: Viewport
  boundaries: MarkColumn | null
  proposals: ProposalColumn | null
  spans: readonly StripSpan[]
  /** Year at each boundary, in the calendar shown; NaN: none (rejected). [boundaries] */
  years: Float64Array | null
  /** How a year is written; default: as a plain number with a real minus sign. */
  yearText?: (year: number) => string
  cursor: number | null
  /** 1 where a boundary is selected, [boundaries]. */
  selected: Uint8Array | null
  /** Index of the selected span. */
  selectedSpan: number | null
  /** The counter has looked at everything younger than this. */
  checkedTo: number | null
}

/** One line of the profile column. */
export interface ProfileLine {
  pyramid: MinMaxPyramid
  /** Least and greatest value shown, left and right edge of the column. */
  domain: readonly [number, number]
  /** `quiet` lies behind. */
  tone: 'ink' | 'quiet'
}

export interface ProfileData {
  viewport: Viewport
  /** Row i of the pyramid lies at path distance i + 0.5. */
  path: PathAxis
  lines: readonly ProfileLine[]
  spans: readonly StripSpan[]
  boundaries: MarkColumn | null
  cursor: number | null
}

/** Probability of every boundary. */
export interface ConfidenceData {
  viewport: Viewport
  position: Float64Array
  probability: Float64Array
  cursor: number | null
}

/** The chronology's error, growing downcore: years the true age may be younger and older than the count says. */
export interface AgeErrorData {
  viewport: Viewport
  position: Float64Array
  younger: Float64Array
  older: Float64Array
  /** Years at the column's edge; null: from the greatest error. */
  limit: number | null
}

/** Counts of several counters side by side. */
export interface CompareData {
  viewport: Viewport
  counters: readonly { name: string; column: MarkColumn }[]
  /** Aligned sites; null where counts are not aligned yet. */
  sites: {
    /** [sites] */
    position: Float64Array
    /** Position of each counter's mark, NaN where absent; [sites x counters], row-major. */
    own: Float64Array
    /** 0 absent, 1 doubtful, 2 certain; [sites x counters], row-major. */
    label: Uint8Array
  } | null
  cursor: number | null
}

export interface OverviewData {
  viewport: Viewport
  /** The scan and its tiles, of which the coarse ones are drawn; null: no scan yet. */
  grid: TileGrid | null
  tile: (key: string) => Picture | undefined
  /** Stretches that have been looked at. */
  checked: readonly { from: number; to: number }[]
  spans: readonly StripSpan[]
  boundaries: MarkColumn | null
  cursor: number | null
}
