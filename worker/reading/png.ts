import { Fault } from '../check.ts'
import { cutShort, readUpTo } from './bytes.ts'
import { crc32 } from './crc32.ts'
import { checkDimensions, checkWholeBytes } from './limits.ts'
import { orientationNotes, pngResolution, readExif } from './resolution.ts'
import type { ByteSource, StatedResolution } from './scanFile.ts'
import { latin1 } from './sniff.ts'
import { damaged } from './tiffDirectory.ts'

/** Colour types of the PNG specification, table 11.1. */
export type PngColour = 0 | 2 | 3 | 4 | 6

export interface PngLayout {
  width: number
  height: number
  /** Bits of a stored sample: 1, 2, 4, 8 or 16. */
  depth: number
  colour: PngColour
  interlaced: boolean
  /** RGB triples, for colour type 3. */
  palette: Uint8Array | null
  /** tRNS: alpha of the palette entries, or the one sample value that is transparent (as 16-bit big-endian numbers). */
  transparency: Uint8Array | null
  /** Where the payloads of the IDAT chunks stand. */
  data: { at: number; length: number }[]
  /** Channels and bits of the samples as they are handed out. */
  channels: 1 | 2 | 3 | 4
  bits: 8 | 16
  resolution: StatedResolution | null
  notes: string[]
}

const samplesOfColour: Record<PngColour, number> = { 0: 1, 2: 3, 3: 1, 4: 2, 6: 4 }
const depthsOfColour: Record<PngColour, number[]> = {
  0: [1, 2, 4, 8, 16],
  2: [8, 16],
  3: [1, 2, 4, 8],
  4: [8, 16],
  6: [8, 16],
}
/** Deflate cannot pack better than this (RFC 1951: a match of 258 bytes in two bits). */
export const bestDeflateRatio = 1032

/** Chunks whose content is wanted; none of them is large. */
const wanted = new Set(['IHDR', 'PLTE', 'tRNS', 'pHYs', 'eXIf'])

/** Walks the chunks of a PNG (PNG specification, section 5) without touching the pixels. */
export async function readPngLayout(source: ByteSource, whole = true): Promise<PngLayout> {
  const chunks = new Map<string, Uint8Array>()
  const data: PngLayout['data'] = []
  let at = 8
  for (let type = ''; type !== 'IEND';) {
    if (at + 12 > source.size)
      throw cutShort(`the PNG chunk at byte ${at}, before the closing IEND,`, at + 12, source.size)
    const head = await source.read(at, 8)
    const length = new DataView(head.buffer, head.byteOffset, 8).getUint32(0)
    type = latin1(head.subarray(4))
    if (at === 8 && type !== 'IHDR') throw damaged('PNG header', type, 'is missing: the first chunk is not IHDR')
    if (!/^[A-Za-z]{4}$/.test(type)) throw damaged(`PNG chunk at byte ${at}`, type, 'has no valid name')
    if (at + 12 + length > source.size)
      throw cutShort(`the PNG chunk ${type} at byte ${at}`, at + 12 + length, source.size)
    if (type === 'IDAT') data.push({ at: at + 8, length })
    if (wanted.has(type) && !chunks.has(type)) chunks.set(type, await readChunk(source, at, length, type))
    at += 12 + length
  }
  return layoutOf(chunks, data, whole)
}

async function readChunk(source: ByteSource, at: number, length: number, type: string): Promise<Uint8Array> {
  if (length > 1 << 20) throw damaged(`PNG chunk ${type}`, length, `is ${length} bytes long`)
  const bytes = await readUpTo(source, at + 4, length + 8)
  const stored = new DataView(bytes.buffer, bytes.byteOffset + 4 + length, 4).getUint32(0)
  const body = bytes.subarray(0, 4 + length)
  if (crc32(body) !== stored) throw damaged(`PNG chunk ${type}`, stored, 'does not match its checksum')
  return body.subarray(4)
}

async function layoutOf(chunks: Map<string, Uint8Array>, data: PngLayout['data'], whole: boolean): Promise<PngLayout> {
  const header = readHeader(chunks.get('IHDR')!)
  const { width, height, depth, colour } = header
  const palette = colour === 3 ? (chunks.get('PLTE') ?? null) : null
  const transparency = colour === 4 || colour === 6 ? null : (chunks.get('tRNS') ?? null)
  if (colour === 3 && (!palette || palette.length === 0 || palette.length % 3 !== 0 || palette.length > 768)) {
    throw damaged('PNG palette', palette?.length ?? 0, `is ${palette?.length ?? 0} bytes long, not 3 to 768 in triples`)
  }
  checkTransparency(transparency, colour)
  const colours = colour === 3 ? 3 : samplesOfColour[colour]
  const channels = (colours + (transparency ? 1 : 0)) as 1 | 2 | 3 | 4
  const bits = depth === 16 ? 16 : 8
  checkDimensions(width, height, whole)
  if (whole) checkWholeBytes(width, height, channels, bits)
  const stored = data.reduce((sum, { length }) => sum + length, 0)
  const raw = height * Math.ceil((width * samplesOfColour[colour] * depth) / 8)
  if (!(stored * bestDeflateRatio >= raw)) {
    throw damaged('PNG image data', stored, `is ${stored} bytes long, too short for ${width} x ${height} pixels`)
  }
  const exif = await readExif(chunks.get('eXIf') ?? new Uint8Array(0))
  const physical = chunks.get('pHYs')
  return {
    ...header,
    palette,
    transparency,
    data,
    channels,
    bits,
    resolution: (physical && pngResolution(physical)) ?? exif.resolution,
    notes: orientationNotes(exif.orientation),
  }
}

function readHeader(chunk: Uint8Array): Pick<PngLayout, 'width' | 'height' | 'depth' | 'colour' | 'interlaced'> {
  if (chunk.length !== 13) throw damaged('PNG header', chunk.length, `is ${chunk.length} bytes long, not 13`)
  const view = new DataView(chunk.buffer, chunk.byteOffset, chunk.byteLength)
  const width = view.getUint32(0)
  const height = view.getUint32(4)
  const [depth, colour, compression, filter, interlace] = chunk.subarray(8)
  const depths = depthsOfColour[colour as PngColour] as number[] | undefined
  if (!depths?.includes(depth)) {
    throw damaged(
      'PNG header',
      `${colour}/${depth}`,
      `states colour type ${colour} with ${depth} bits, which PNG does not have`,
    )
  }
  if (compression !== 0 || filter !== 0 || interlace > 1) {
    throw new Fault(
      'unsupported',
      'PNG header',
      `${compression}/${filter}/${interlace}`,
      'the PNG uses a compression, filter or interlace method that is not part of the standard. Save it again as a plain PNG.',
    )
  }
  return { width, height, depth, colour: colour as PngColour, interlaced: interlace === 1 }
}

function checkTransparency(transparency: Uint8Array | null, colour: PngColour): void {
  if (!transparency) return
  const expected = colour === 3 ? null : samplesOfColour[colour] * 2
  if (expected === null ? transparency.length > 256 : transparency.length !== expected) {
    throw damaged(
      'PNG transparency',
      transparency.length,
      `is ${transparency.length} bytes long, which does not fit its colour type`,
    )
  }
}
