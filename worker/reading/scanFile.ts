import type { ScanShape } from '../core/scan.ts'
import type { Region } from '../units.ts'
import type { Progress, Samples } from '../work.ts'

/** Bytes on demand: a file, a Blob, or memory. Reading past the end rejects with a Fault that names the place. */
export interface ByteSource {
  readonly size: number
  read(offset: number, length: number): Promise<Uint8Array>
}

/** Resolution as the file states it, in pixels per millimetre; shown to the user, never trusted silently. */
export interface StatedResolution {
  xPerMm: number
  yPerMm: number
  /** Where it stands, for example "TIFF XResolution, per inch". */
  source: string
}

/** One level of a pyramid; level 0 is the scan itself, `shrink` how many scan pixels one of its pixels spans. */
export interface ScanLevel {
  width: number
  height: number
  shrink: number
}

export type ScanFormat = 'png' | 'jpeg' | 'webp' | 'tiff'

export interface ScanInfo extends ScanShape {
  sha256: string
  name: string
  bytes: number
  format: ScanFormat
  resolution: StatedResolution | null
  levels: ScanLevel[]
  /** Things the user should know, for example "alpha channel ignored". */
  notes: string[]
}

/** An open scan: windowed reads of the file's own values, no colour management, nothing premultiplied. */
export interface Scan {
  readonly info: ScanInfo
  /** Samples of a region at a level, in that level's pixels; the region must lie inside the level. */
  readRegion(region: Region, level?: number): Promise<Samples>
  /** Makes the levels that the file does not hold, where there are any to make; readRegion does so too when first asked for one, but without progress. */
  buildOverview?(onProgress?: (progress: Progress) => void, signal?: AbortSignal): Promise<void>
  close(): void
}
