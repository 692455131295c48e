import { Fault } from '../check.ts'
import { cutShort } from './bytes.ts'
import { checkDimensions } from './limits.ts'
import { orientationNotes, readExif } from './resolution.ts'
import type { ByteSource, StatedResolution } from './scanFile.ts'
import { latin1 } from './sniff.ts'
import { damaged } from './tiffDirectory.ts'

/** What the chunks of a WebP say (RFC 9649). */
export interface WebpLayout {
  width: number
  height: number
  channels: 3 | 4
  /** The chunks that matter to decoding, as byte ranges [from, to): ALPH and VP8 or VP8L. */
  essential: { from: number; to: number }[]
  resolution: StatedResolution | null
  notes: string[]
}

/** Even a blank picture takes some bytes; more pixels for each byte than this is a damaged header. */
const mostPixelsPerByte = 20_000

interface Bitstream {
  width: number
  height: number
  alpha: boolean
}

/** Walks the chunks of a WebP without decoding it; animations are refused. */
export async function readWebpLayout(source: ByteSource): Promise<WebpLayout> {
  if (source.size < 20) throw cutShort('the WebP header', 20, source.size)
  const end = 8 + littleEndian(await source.read(4, 4), 0, 4)
  if (end > source.size) throw cutShort('the WebP (RIFF) container', end, source.size)
  const essential: WebpLayout['essential'] = []
  let bitstream: Bitstream | null = null
  let alphaChunk = false
  let exif: Awaited<ReturnType<typeof readExif>> = { resolution: null, orientation: 1 }
  for (let at = 12; at + 8 <= end;) {
    const head = await source.read(at, 8)
    const type = latin1(head.subarray(0, 4))
    const length = littleEndian(head, 4, 4)
    const next = at + 8 + length + (length & 1)
    if (at + 8 + length > end)
      throw cutShort(`the WebP chunk ${JSON.stringify(type)} at byte ${at}`, at + 8 + length, end)
    if (type === 'ANIM' || type === 'ANMF') {
      throw new Fault(
        'unsupported',
        'WebP',
        type,
        'the WebP is an animation; a scan is a single picture. Save one frame as PNG or TIFF.',
      )
    }
    if (type === 'ALPH' || type === 'VP8 ' || type === 'VP8L') essential.push({ from: at, to: Math.min(next, end) })
    if (type === 'ALPH') alphaChunk = true
    if ((type === 'VP8 ' || type === 'VP8L') && !bitstream) {
      const start = await source.read(at + 8, Math.min(10, length))
      bitstream = type === 'VP8 ' ? lossyHeader(start) : losslessHeader(start)
    }
    if (type === 'EXIF') exif = await readExif(withoutPrefix(await source.read(at + 8, Math.min(length, 1 << 16))))
    at = next
  }
  if (!bitstream) throw damaged('WebP', end, 'holds no picture')
  const { width, height } = bitstream
  checkDimensions(width, height, true)
  if (!(width * height <= mostPixelsPerByte * source.size)) {
    throw damaged(
      'WebP',
      source.size,
      `is ${source.size} bytes long, too short for the ${width} x ${height} pixels it states`,
    )
  }
  return {
    width,
    height,
    channels: bitstream.alpha || alphaChunk ? 4 : 3,
    essential,
    resolution: exif.resolution,
    notes: orientationNotes(exif.orientation),
  }
}

/** RFC 6386, 9.1: a key frame's start code, then 14 bits of width and of height. */
function lossyHeader(start: Uint8Array): Bitstream {
  if (start.length < 10 || (start[0] & 1) !== 0 || start[3] !== 0x9d || start[4] !== 0x01 || start[5] !== 0x2a) {
    throw damaged('WebP picture', start.length, 'does not begin with a key frame')
  }
  return { width: littleEndian(start, 6, 2) & 0x3fff, height: littleEndian(start, 8, 2) & 0x3fff, alpha: false }
}

/** RFC 9649, 3.4: signature 0x2f, 14 bits each of width - 1 and height - 1, one bit that says whether alpha is used. */
function losslessHeader(start: Uint8Array): Bitstream {
  if (start.length < 5 || start[0] !== 0x2f)
    throw damaged('WebP picture', start.length, 'does not begin with its signature')
  const bits = littleEndian(start, 1, 4)
  return { width: (bits & 0x3fff) + 1, height: ((bits >>> 14) & 0x3fff) + 1, alpha: ((bits >>> 28) & 1) === 1 }
}

/** Some writers put the JPEG prefix "Exif" before the block. */
function withoutPrefix(block: Uint8Array): Uint8Array {
  return latin1(block.subarray(0, 6)) === 'Exif\0\0' ? block.subarray(6) : block
}

function littleEndian(bytes: Uint8Array, at: number, count: number): number {
  let value = 0
  for (let i = count - 1; i >= 0; i--) value = value * 256 + bytes[at + i]
  return value
}

/** A WebP of nothing but its picture: a new container around the essential chunks. */
export function webpFile(layout: WebpLayout, chunks: Blob[]): Blob {
  const extended = chunks.length > 1 ? [extendedHeader(layout)] : []
  const length = [...extended, ...chunks].reduce(
    (sum, part) => sum + (part instanceof Blob ? part.size : part.length),
    4,
  )
  const head = new Uint8Array(12)
  head.set([0x52, 0x49, 0x46, 0x46], 0)
  new DataView(head.buffer).setUint32(4, length, true)
  head.set([0x57, 0x45, 0x42, 0x50], 8)
  return new Blob([head, ...extended, ...chunks], { type: 'image/webp' })
}

/** VP8X (RFC 9649, 2.7.1): flags with the alpha bit, then width - 1 and height - 1 in 24 bits. */
function extendedHeader({ width, height }: WebpLayout): Uint8Array<ArrayBuffer> {
  const header = new Uint8Array(18)
  header.set([0x56, 0x50, 0x38, 0x58, 10, 0, 0, 0, 0x10])
  const view = new DataView(header.buffer)
  view.setUint32(12, (width - 1) & 0xffffff, true)
  view.setUint16(15, (height - 1) & 0xffff, true)
  header[17] = (height - 1) >> 16
  return header
}
