import { samplesOf } from '../core/scan.ts'
import type { Progress, Samples } from '../work.ts'
import { samplesArray } from './pixelStore.ts'
import type { PixelStore } from './pixelStore.ts'
import type { ScanInfo, ScanLevel } from './scanFile.ts'
import { pacer } from './turns.ts'

/** The coarsest level is at most this long, pixels: small enough to be drawn whole. */
const overviewLength = 1000
/** The first level that we make ourselves, in memory, may take this much. */
const mostOverviewBytes = 128 << 20

type Shape = Pick<ScanInfo, 'channels' | 'bits'>

/** Levels to be made below those that the file holds: each half the one before, down to about 1,000 pixels. */
export function furtherLevels(levels: ScanLevel[], shape: Shape, inMemory: boolean): ScanLevel[] {
  const last = levels.at(-1)!
  const further: ScanLevel[] = []
  let longer = Math.max(last.width, last.height)
  for (let factor = 2; longer > overviewLength; factor *= 2) {
    const level = {
      width: Math.ceil(last.width / factor),
      height: Math.ceil(last.height / factor),
      shrink: last.shrink * factor,
    }
    longer = Math.max(level.width, level.height)
    const bytes = level.width * level.height * shape.channels * (shape.bits / 8)
    // A file is passed once, straight to the first level that fits into memory; steps between would be passes of their own.
    if (inMemory || further.length > 0 || bytes <= mostOverviewBytes) further.push(level)
  }
  return further
}

/**
 * Makes a level from the next finer one: every pixel is the mean of the square of pixels that it spans, rounded to the
 * nearest; squares at the right and lower edge may be cut. The finer level is read in bands.
 */
export async function makeLevel(
  store: PixelStore,
  from: number,
  finer: ScanLevel,
  coarser: ScanLevel,
  shape: Shape,
  onProgress?: (progress: Progress) => void,
  signal?: AbortSignal,
): Promise<Samples> {
  const factor = coarser.shrink / finer.shrink
  const { channels } = shape
  const output = samplesArray(shape.bits, coarser.width * coarser.height * channels)
  const bandRows = Math.ceil(Math.max(store.rowsOfBand(from), 64) / factor) * factor
  const pace = pacer()
  for (let y = 0; y < finer.height; y += bandRows) {
    signal?.throwIfAborted()
    const height = Math.min(bandRows, finer.height - y)
    const band = await store.read({ x: 0, y, width: finer.width, height }, from)
    shrinkBand(band, factor, output.subarray((y / factor) * coarser.width * channels))
    onProgress?.({ stage: 'overview', done: y + height, total: finer.height })
    await pace()
  }
  return samplesOf(output, coarser.width, coarser.height, channels)
}

/** Averages squares of factor x factor pixels of a band whose rows lie in order. */
function shrinkBand(band: Samples, factor: number, output: Uint8Array | Uint16Array): void {
  const [height, width, channels] = band.shape
  const columns = Math.ceil(width / factor)
  const sums = new Float64Array(columns * channels)
  for (let row = 0, to = 0; row * factor < height; row++) {
    const last = Math.min(height, (row + 1) * factor)
    sums.fill(0)
    for (let y = row * factor; y < last; y++) addRow(band.data, y * width * channels, width, channels, factor, sums)
    for (let column = 0, i = 0; column < columns; column++) {
      const count = (last - row * factor) * Math.min(factor, width - column * factor)
      for (let channel = 0; channel < channels; channel++) output[to++] = Math.floor(sums[i++] / count + 0.5)
    }
  }
}

/** Adds each pixel of a row to the sum of its square. */
function addRow(
  data: Uint8Array | Uint16Array,
  start: number,
  width: number,
  channels: number,
  factor: number,
  sums: Float64Array,
): void {
  let from = start
  for (let x = 0, to = 0; x < width; x += factor, to += channels) {
    const end = from + Math.min(factor, width - x) * channels
    while (from < end) {
      for (let channel = 0; channel < channels; channel++) sums[to + channel] += data[from++]
    }
  }
}
