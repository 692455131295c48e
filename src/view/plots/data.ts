import type { Span } from '../../../worker/core/ladder.ts'

/*
 * What the plot painters are given: columns ready to draw. Depths in millimetres, years in the calendar shown.
 */

/** Calendars as shown. `varve` counts years from the top of the core. Values in `CE` are astronomical years (0 = 1 BCE). */
export type Calendar = 'varve' | 'CE' | 'cal BP' | 'b2k'

/** An uncertainty band, [points] each. */
export interface Band {
  low: Float64Array
  high: Float64Array
}

export type DepthSpan = Pick<Span, 'from' | 'to' | 'kind'>

/** A dated sample, with its own age distribution if there is one. */
export interface DatedLevel {
  id: string
  depthFrom: number
  depthTo: number
  /** Years and relative densities of the date by itself, [values]; a known year has one value. */
  years: Float64Array
  density: Float64Array
  /** Left out by the model or likely to be an outlier: drawn hollow. */
  doubtful: boolean
}

export interface AgeDepthData {
  calendar: Calendar
  /** Side on which the older years lie; by default right, for CE left. */
  older?: 'left' | 'right'
  /** Depth of each boundary, mm, increasing. [points] */
  depth: Float64Array
  central: Float64Array
  /** What the central line is, for the legend: "Mean of the counts", "Posterior mean". */
  centralName: string
  band68: Band | null
  band95: Band | null
  counters: readonly { name: string; depth: Float64Array; years: Float64Array }[]
  dates: readonly DatedLevel[]
  spans: readonly DepthSpan[]
  depthUnit: 'mm' | 'cm'
  caption?: string
}

export interface ThicknessData {
  calendar: Calendar
  older?: 'left' | 'right'
  /** Year of each layer and its thickness in mm, [layers]. Layers of unknown thickness are NaN. */
  year: Float64Array
  thickness: Float64Array
  /** Running mean, [layers], and the number of years it runs over. */
  mean: Float64Array | null
  meanYears: number
  band: Band | null
  /** Title and unit of the value axis; by default "Varve thickness", "mm". */
  title?: string
  unit?: string
  caption?: string
}

export interface DifferencesData {
  /** Each counter's cumulative count minus the mean of all, along depth (mm). */
  counters: readonly { name: string; depth: Float64Array; difference: Float64Array }[]
  /** Counting error around zero, if known. */
  band: { depth: Float64Array; low: Float64Array; high: Float64Array; name: string } | null
  horizons: readonly { depth: number; name: string }[]
  depthUnit: 'mm' | 'cm'
  caption?: string
}

export interface AgreementData {
  /** Depths in mm; marks as indices into the document's `marks`. */
  counters: readonly { name: string; depth: Float64Array; mark: Uint8Array }[]
  /** Sites with labels 0 absent, 1 doubtful, 2 certain, [sites x counters]; own depths likewise, NaN where absent. */
  sites: { depth: Float64Array; own: Float64Array; label: Uint8Array } | null
  /** Stretch shown, mm. */
  from: number
  to: number
  depthUnit: 'mm' | 'cm'
  caption?: string
}

export interface HistogramData {
  /** Edges of the bins, one more than there are bins. */
  edges: Float64Array
  count: Float64Array
  title: string
  unit: string | null
  countTitle: string
  /** Values pointed out, for example the median. */
  marks: readonly { value: number; name: string }[]
  caption?: string
}
