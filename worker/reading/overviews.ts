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
  const readBand = (y: number) =>
    store.read({ x: 0, y, width: finer.width, height: Math.min(bandRows, finer.height - y) }, from)
  let next = readBand(0)
  for (let y = 0; y < finer.height; y += bandRows) {
    signal?.throwIfAborted()
    const band = await next
    // The next band is unpacked by other threads while this one is averaged. Should it fail, it is awaited in its turn.
    if (y + bandRows < finer.height) {
      next = readBand(y + bandRows)
      next.catch(() => undefined)
    }
    shrinkBand(band, factor, output.subarray((y / factor) * coarser.width * channels))
    onProgress?.({ stage: 'overview', done: Math.min(y + bandRows, finer.height), total: finer.height })
    await pace()
  }
  return samplesOf(output, coarser.width, coarser.height, channels)
}

/** Averages squares of factor x factor pixels of a band whose rows lie in order. */
function shrinkBand(band: Samples, factor: number, output: Uint8Array | Uint16Array): void {
  const [height, width, channels] = band.shape
  const rowLength = Math.ceil(width / factor) * channels
  const halved = factor === 2 && width > 1
  const sums = new Uint32Array(rowLength)
  for (let row = 0; row * factor < height; row++) {
    const target = output.subarray(row * rowLength, (row + 1) * rowLength)
    const first = row * factor
    const last = Math.min(height, first + factor)
    // Halving full squares is nearly all of the work; its loop is written for it.
    const done = halved && last - first === 2 ? halveRows(band.data, first, width, channels, target) : 0
    if (done < rowLength) averageRows(band, first, last, factor, done, sums, target)
  }
}

/** Means of the full squares of two rows, rounded to the nearest; returns how many samples of the row they make. */
function halveRows(
  data: Uint8Array | Uint16Array,
  row: number,
  width: number,
  channels: number,
  target: Uint8Array | Uint16Array,
): number {
  const full = (width >> 1) * channels
  let upper = row * width * channels
  let lower = upper + width * channels
  for (let to = 0; to < full;) {
    for (let channel = 0; channel < channels; channel++, upper++, lower++) {
      target[to++] = (data[upper] + data[upper + channels] + data[lower] + data[lower + channels] + 2) >> 2
    }
    upper += channels
    lower += channels
  }
  return full
}

/** Means of squares of any size, cut ones too, from sample `from` of the target row on. */
function averageRows(
  band: Samples,
  first: number,
  last: number,
  factor: number,
  from: number,
  sums: Uint32Array,
  target: Uint8Array | Uint16Array,
): void {
  const [, width, channels] = band.shape
  const { data } = band
  sums.fill(0)
  for (let y = first; y < last; y++) {
    let at = (y * width + (from / channels) * factor) * channels
    for (let to = from; to < target.length; to += channels) {
      const end = at + Math.min(factor, width - (to / channels) * factor) * channels
      while (at < end) for (let channel = 0; channel < channels; channel++) sums[to + channel] += data[at++]
    }
  }
  for (let to = from; to < target.length; to++) {
    const columns = Math.min(factor, width - Math.floor(to / channels) * factor)
    const count = (last - first) * columns
    target[to] = Math.floor(sums[to] / count + 0.5)
  }
}
