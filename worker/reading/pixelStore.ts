import type { Region } from '../units.ts'
import type { Samples } from '../work.ts'
import type { ScanLevel } from './scanFile.ts'

/** Where the samples of an open scan come from: a file read block by block, or memory. Regions are inside their level. */
export interface PixelStore {
  /** The levels that the file itself holds; the first is the scan. */
  levels: ScanLevel[]
  read(region: Region, level: number): Promise<Samples>
  /** Rows that are best read together, for a pass over the whole level. */
  rowsOfBand(level: number): number
  close(): void
}

/** An array for samples of 8 or 16 bits. */
export function samplesArray(bits: 8 | 16, length: number): Uint8Array | Uint16Array {
  return bits === 16 ? new Uint16Array(length) : new Uint8Array(length)
}
