import type { NdArray } from 'ndarray'
import type { Region } from './units.ts'

/** How far a long computation has come: `done` of `total` parts of the named stage. */
export interface Progress {
  stage: string
  done: number
  total: number
}

/** Samples of a region of a scan as read from the file: shape [rows, columns, channels], strides in elements. */
export type Samples = NdArray<Uint8Array> | NdArray<Uint16Array>

/** What a computation asks of the scan it works on; it is resumed with the samples. */
export interface RegionWanted {
  read: Region
}

/**
 * A long computation: a generator that yields progress between plain inner blocks and returns its result.
 * The worker drives it in slices so that it can be cancelled at any yield; elsewhere `finish` runs it straight through.
 */
export type Work<Result> = Generator<Progress, Result, void>

/** A long computation that also asks for regions of a scan; it must be resumed with the samples after each `RegionWanted`. */
export type ScanWork<Result> = Generator<Progress | RegionWanted, Result, Samples | undefined>

/** Runs a computation straight through. */
export function finish<Result>(work: Work<Result>): Result {
  for (;;) {
    const step = work.next()
    if (step.done) return step.value
  }
}
