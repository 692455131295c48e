import ndarray from 'ndarray'
import { checkInteger } from '../check.ts'
import type { Samples } from '../work.ts'

/** The form of a scan: how many pixels, how many channels (1 grey, 2 grey + alpha, 3 RGB, 4 RGBA), how many bits in a sample. */
export interface ScanShape {
  width: number
  height: number
  channels: 1 | 2 | 3 | 4
  bits: 8 | 16
}

/** Which way the core lies in its scan: along x or y, with the young end where that coordinate is low or high. */
export interface Orientation {
  axis: 'x' | 'y'
  young: 'low' | 'high'
}

/** Length of the core in scan pixels, along its axis. */
export function coreLength(shape: ScanShape, orientation: Orientation): number {
  return orientation.axis === 'x' ? shape.width : shape.height
}

/**
 * A view (no copy) of samples [rows, columns, channels] turned so that index 0 runs downcore from the young end
 * and index 1 across the core, left to right when the core stands upright, young side up.
 */
export function uprightView(samples: Samples, orientation: Orientation): Samples {
  const turned = orientation.axis === 'y' ? samples : samples.transpose(1, 0, 2)
  const flipDown = orientation.young === 'high'
  // A quarter turn, not a mirror: for an x axis the across direction runs against y when the young end is left.
  const flipAcross = orientation.axis === 'y' ? flipDown : !flipDown
  return turned.step(flipDown ? -1 : 1, flipAcross ? -1 : 1, 1)
}

/** Wraps raw interleaved samples in row order as an ndarray of shape [height, width, channels]. */
export function samplesOf(data: Uint8Array | Uint16Array, width: number, height: number, channels: number): Samples {
  checkInteger('width', width, 1)
  checkInteger('height', height, 1)
  return ndarray(data as Uint8Array, [height, width, channels], [width * channels, channels, 1])
}
