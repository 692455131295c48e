import type { C14Measurement, Calibration } from './core/calibrate.ts'
import type { Candidates } from './core/candidates.ts'
import type { Chronology, ChronologyRequest } from './core/chronology.ts'
import type { Agreement, AgreementOptions } from './core/counts.ts'
import type { CountedLayers } from './core/countedLayers.ts'
import type { Curve } from './core/curve.ts'
import type { CoreWiggle } from './core/coreWiggle.ts'
import type { DatesTable } from './core/datesTable.ts'
import type { DatingRequest, DatingResult } from './core/dating.ts'
import type { LeadAges, LeadProfile } from './core/lead210.ts'
import type { WholeYears } from './core/stepLaws.ts'
import type { CountOfSection } from './core/layersOfCount.ts'
import type { CountColumns, CountTable } from './core/countTable.ts'
import type { CounterMarks } from './core/counterMarks.ts'
import type { Detrended } from './core/detrend.ts'
import type { Display } from './core/display.ts'
import type { Ladder, Span } from './core/ladder.ts'
import type { Profile, ProfileRecipe } from './core/profile.ts'
import type { LevelAges } from './core/levelAges.ts'
import type { ThicknessSummary } from './core/rates.ts'
import type { Recipe } from './core/recipe.ts'
import type { Orientation } from './core/scan.ts'
import type { ChronologyColumns, YearBoundary } from './core/tables.ts'
import type { Transect } from './core/transect.ts'
import type { FaultCode } from './check.ts'
import type { ScanInfo } from './reading/scanFile.ts'
import type { Region } from './units.ts'
import type { Progress } from './work.ts'

/** Raised whenever a request or a reply changes its form; page and worker must agree. */
export const protocolVersion = 1

/** What a table is made of. */
export type TableRequest =
  | { table: 'layers'; boundaries: YearBoundary[]; spans: Span[]; mmPerPx: number | null; depthTop: number }
  | { table: 'profile'; profile: Profile; detrended: Detrended; mmPerPx: number | null; depthTop: number }
  | { table: 'chronology'; chronology: ChronologyColumns }
  | { table: 'ages'; names: string[]; depth: Float64Array; ages: LevelAges }

/** One type map: every job's request and reply. Scans are named by their SHA-256 once opened. */
export interface Jobs {
  /** The recipe a new section starts with; the page holds no copy of the defaults. */
  defaultRecipe: { request: null; reply: Recipe }
  openScan: { request: { file: Blob; name: string }; reply: ScanInfo }
  closeScan: { request: { scan: string }; reply: null }
  /** A display that fills the screen's range with the scan's own values. */
  stretch: { request: { scan: string }; reply: Display }
  /** A region of a level, turned upright, as RGBA for the screen. */
  tile: {
    request: { scan: string; level: number; region: Region; orientation: Orientation; display: Display }
    reply: { width: number; height: number; rgba: Uint8ClampedArray<ArrayBuffer> }
  }
  profile: { request: { scan: string; transect: Transect; recipe: ProfileRecipe }; reply: Profile }
  /** A count made elsewhere, read from CSV text with every bad row named. */
  countTable: { request: { text: string; name: string; columns: CountColumns }; reply: CountTable }
  /** Repeat counts of one stretch, aligned and compared. */
  agreement: { request: { counts: CounterMarks[]; options?: Partial<AgreementOptions> }; reply: Agreement }
  /** Years and their error at every boundary of a count. */
  chronology: { request: ChronologyRequest; reply: Chronology }
  /** The layers of a count as rows for the ages; see core/layersOfCount.ts. */
  layersOfCount: { request: CountOfSection; reply: CountedLayers }
  /** Exact calendar ages of every row of counted layers, given all dates. */
  date: { request: DatingRequest; reply: DatingResult }
  /** The years between two rows of counted layers, given all dates. */
  yearsBetween: { request: { dating: DatingRequest; upper: number; lower: number }; reply: WholeYears }
  /** Whole chronologies drawn from the posterior: astronomical years, [samples x rows]. */
  sampleYears: { request: { dating: DatingRequest; samples: number; seed: number }; reply: Int32Array }
  /** The radiocarbon dates of a core on the curve, the count taken as exact. */
  wiggle: { request: DatingRequest; reply: CoreWiggle }
  /** One radiocarbon date over the years of the chosen curve. */
  calibrate: { request: { date: C14Measurement; curves: Curve[]; curve: string | null }; reply: Calibration }
  /** A table of dates read from CSV text, with every bad row named. */
  datesTable: { request: { text: string; name: string }; reply: DatesTable }
  /** Ages of a 210Pb profile by constant rate of supply. */
  lead210: { request: LeadProfile; reply: LeadAges }
  /** A calibration curve from the text of its file. */
  curve: { request: { text: string; name: string; sha256: string }; reply: Curve }
  /** Figures and running mean of a thickness series. */
  thickness: {
    request: { thickness: Float64Array; window: number }
    reply: { summary: ThicknessSummary | null; mean: Float64Array }
  }
  /** A table as CSV text; see core/tables.ts for its columns. */
  table: { request: TableRequest; reply: string }
  ladder: {
    request: { profile: Profile; spans: Span[]; fixed: Float64Array; recipe: Recipe }
    reply: { detrended: Detrended; candidates: Candidates; ladder: Ladder }
  }
}

export type JobKind = keyof Jobs
export type Request<K extends JobKind> = Jobs[K]['request']
export type Reply<K extends JobKind> = Jobs[K]['reply']

/** What a job came to grief on: see check.ts. */
export interface Failure {
  code: FaultCode
  field: string
  value: string
  message: string
}

export type ToWorker =
  { type: 'run'; job: number; kind: JobKind; request: Request<JobKind> } | { type: 'cancel'; job: number }

/** After any number of `progress`, exactly one of `done`, `failed`, `cancelled` for each job. */
export type FromWorker =
  | { type: 'ready'; protocol: number }
  | { type: 'progress'; job: number; progress: Progress }
  | { type: 'done'; job: number; reply: Reply<JobKind> }
  | { type: 'failed'; job: number; failure: Failure }
  | { type: 'cancelled'; job: number }
