import type { Progress } from '../work.ts'
import { inflatePieces } from './inflate.ts'
import { samplesArray } from './pixelStore.ts'
import type { PngLayout } from './png.ts'
import type { ByteSource } from './scanFile.ts'
import { damaged } from './tiffDirectory.ts'
import { streamOf } from './tiffStrip.ts'
import { pacer } from './turns.ts'
import { tooShort } from './lzw.ts'
import { unfilter } from './pngFilter.ts'

const windowBytes = 4 << 20

/** The seven passes of an interlaced PNG (PNG specification, 8.2): first pixel and step in x and y. */
const passes = [
  { x: 0, y: 0, stepX: 8, stepY: 8 },
  { x: 4, y: 0, stepX: 8, stepY: 8 },
  { x: 0, y: 4, stepX: 4, stepY: 8 },
  { x: 2, y: 0, stepX: 4, stepY: 4 },
  { x: 0, y: 2, stepX: 2, stepY: 4 },
  { x: 1, y: 0, stepX: 2, stepY: 2 },
  { x: 0, y: 1, stepX: 1, stepY: 2 },
]

interface Pass {
  x: number
  y: number
  stepX: number
  stepY: number
  columns: number
  rows: number
}

/**
 * All samples of a PNG, shape [height, width, channels]. The file is read and unpacked as a stream, a row at a time;
 * only the samples are held. Our own decoder, because a canvas would premultiply alpha and cut 16 bits to 8.
 */
export async function decodePng(
  source: ByteSource,
  png: PngLayout,
  onProgress?: (progress: Progress) => void,
  signal?: AbortSignal,
): Promise<Uint8Array | Uint16Array> {
  const samples = samplesArray(png.bits, png.width * png.height * png.channels)
  const rows = rowsOf(inflatePieces(streamOf(imageData(source, png))), png)
  const pace = pacer()
  let done = 0
  for (const pass of passesOf(png)) {
    for (let row = 0; row < pass.rows; row++) {
      const bytes = await rows(pass)
      placeRow(png, bytes, pass, row, samples)
      done += pass.columns
      if (row % 64 === 0) {
        signal?.throwIfAborted()
        onProgress?.({ stage: 'decode', done, total: png.width * png.height })
        await pace()
      }
    }
  }
  await rows(null)
  return samples
}

function passesOf(png: PngLayout): Pass[] {
  const { width, height } = png
  if (!png.interlaced) return [{ x: 0, y: 0, stepX: 1, stepY: 1, columns: width, rows: height }]
  return passes
    .map((pass) => ({
      ...pass,
      columns: Math.ceil((width - pass.x) / pass.stepX),
      rows: Math.ceil((height - pass.y) / pass.stepY),
    }))
    .filter(({ columns, rows }) => columns > 0 && rows > 0)
}

/** The payloads of the IDAT chunks, read in large windows however small the chunks are. */
async function* imageData(source: ByteSource, png: PngLayout): AsyncGenerator<Uint8Array> {
  let from = 0
  let bytes = new Uint8Array(0)
  for (const chunk of png.data) {
    const end = chunk.at + chunk.length
    for (let at = chunk.at; at < end;) {
      if (at >= from + bytes.length || at < from) {
        from = at
        bytes = (await source.read(at, Math.min(windowBytes, source.size - at))) as Uint8Array<ArrayBuffer>
      }
      const part = bytes.subarray(at - from, Math.min(bytes.length, end - from))
      yield part
      at += part.length
    }
  }
}

/**
 * A function that returns the next unfiltered row of a pass (a view, valid until the next call).
 * Called with null at the end, it reads on to the stream's checksum.
 */
function rowsOf(pieces: AsyncGenerator<Uint8Array>, png: PngLayout): (pass: Pass | null) => Promise<Uint8Array> {
  const samples = png.colour === 2 ? 3 : png.colour === 4 ? 2 : png.colour === 6 ? 4 : 1
  const pixelBits = samples * png.depth
  const pixelBytes = Math.max(1, pixelBits >> 3)
  let piece = new Uint8Array(0)
  let at = 0
  let current = new Uint8Array(0)
  let previous = new Uint8Array(0)
  let lastPass: Pass | null = null
  const nextPiece = async () => {
    try {
      const step = await pieces.next()
      at = 0
      piece = step.done ? new Uint8Array(0) : (step.value as Uint8Array<ArrayBuffer>)
      return !step.done
    } catch {
      throw damaged('PNG image data', png.data.length, 'breaks off or is garbled')
    }
  }
  return async (pass) => {
    if (!pass) {
      await nextPiece()
      return piece
    }
    const length = Math.ceil((pass.columns * pixelBits) / 8) + 1
    if (pass !== lastPass) {
      current = new Uint8Array(length)
      previous = new Uint8Array(length)
      lastPass = pass
    }
    const swap = previous
    previous = current
    current = swap
    for (let filled = 0; filled < length;) {
      if (at === piece.length && !(await nextPiece())) throw tooShort('PNG image', filled, length)
      const part = piece.subarray(at, at + length - filled)
      current.set(part, filled)
      filled += part.length
      at += part.length
    }
    unfilter(current, previous, pixelBytes)
    return current.subarray(1)
  }
}

/** Puts one unfiltered row of a pass in its place in the samples. */
function placeRow(png: PngLayout, bytes: Uint8Array, pass: Pass, row: number, samples: Uint8Array | Uint16Array): void {
  const { width, channels, depth } = png
  const start = ((pass.y + row * pass.stepY) * width + pass.x) * channels
  const step = pass.stepX * channels
  if (depth === 8 && step === channels && png.colour !== 3 && !png.transparency) {
    samples.set(bytes.subarray(0, pass.columns * channels), start)
  } else if (png.colour === 3) {
    placePalette(png, bytes, pass.columns, samples, start, step)
  } else {
    placeSamples(png, bytes, pass.columns, samples, start, step)
  }
}

function placeSamples(
  png: PngLayout,
  bytes: Uint8Array,
  columns: number,
  samples: Uint8Array | Uint16Array,
  start: number,
  step: number,
): void {
  const { depth, transparency } = png
  const stored = png.channels - (transparency ? 1 : 0)
  // Fewer than eight bits are spread over the full range (PNG specification, 13.12).
  const factor = depth < 8 ? 255 / ((1 << depth) - 1) : 1
  const clear =
    transparency && Array.from({ length: stored }, (_, i) => (transparency[2 * i] << 8) | transparency[2 * i + 1])
  for (let column = 0, to = start; column < columns; column++, to += step) {
    let matches = clear !== null
    for (let channel = 0; channel < stored; channel++) {
      const value = sampleAt(bytes, column * stored + channel, depth)
      if (clear && value !== clear[channel]) matches = false
      samples[to + channel] = value * factor
    }
    if (clear) samples[to + stored] = matches ? 0 : png.bits === 16 ? 65535 : 255
  }
}

function placePalette(
  png: PngLayout,
  bytes: Uint8Array,
  columns: number,
  samples: Uint8Array | Uint16Array,
  start: number,
  step: number,
): void {
  const palette = png.palette!
  const { transparency } = png
  for (let column = 0, to = start; column < columns; column++, to += step) {
    const index = sampleAt(bytes, column, png.depth)
    if (3 * index >= palette.length)
      throw damaged('PNG image data', index, `names colour ${index}, which its palette does not hold`)
    samples[to] = palette[3 * index]
    samples[to + 1] = palette[3 * index + 1]
    samples[to + 2] = palette[3 * index + 2]
    if (transparency) samples[to + 3] = index < transparency.length ? transparency[index] : 255
  }
}

function sampleAt(bytes: Uint8Array, index: number, depth: number): number {
  if (depth === 8) return bytes[index]
  if (depth === 16) return (bytes[2 * index] << 8) | bytes[2 * index + 1]
  const bit = index * depth
  return (bytes[bit >> 3] >> (8 - depth - (bit & 7))) & ((1 << depth) - 1)
}
