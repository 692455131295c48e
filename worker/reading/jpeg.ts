import { Fault } from '../check.ts'
import { cutShort } from './bytes.ts'
import { checkDimensions } from './limits.ts'
import { jfifResolution, orientationNotes, readExif } from './resolution.ts'
import type { ByteSource, StatedResolution } from './scanFile.ts'
import { latin1 } from './sniff.ts'
import { damaged } from './tiffDirectory.ts'

/** What the markers of a JPEG say (ITU-T T.81, annex B). */
export interface JpegLayout {
  width: number
  height: number
  /** 1 grey, 3 colour. */
  channels: 1 | 3
  /** Byte ranges [from, to) that matter to decoding: all but the APPn and COM segments, save Adobe's APP14. */
  essential: { from: number; to: number }[]
  /** Start and end of the entropy-coded scans, the closing marker excluded. */
  resolution: StatedResolution | null
  notes: string[]
}

interface Frame {
  width: number
  height: number
  components: number
  /** Fewest bits in which the picture could have been coded. */
  leastBits: number
}

const windowBytes = 1 << 20

/** Walks a JPEG from marker to marker, through the entropy-coded data, until it closes; a file without its end is refused. */
export async function readJpegLayout(source: ByteSource, whole = true): Promise<JpegLayout> {
  const essential: JpegLayout['essential'] = [{ from: 0, to: 2 }]
  const notes: string[] = []
  let resolution: StatedResolution | null = null
  let exifResolution: StatedResolution | null = null
  let frame: Frame | null = null
  let scans = 0
  let at = 2
  for (;;) {
    const marker = await readMarker(source, at)
    at = marker.at + 2
    if (marker.code === 0xd9) {
      essential.push({ from: marker.at, to: at })
      break
    }
    if (marker.code === 0x01 || (marker.code >= 0xd0 && marker.code <= 0xd8)) continue
    const segment = await readSegment(source, at, marker.code)
    const end = at + 2 + segment.length
    if (!isMetadata(marker.code, segment)) essential.push({ from: marker.at, to: end })
    if (isFrame(marker.code)) {
      if (frame) throw damaged('JPEG', marker.at, 'holds more than one frame header')
      frame = readFrame(segment, marker.code)
    } else if (marker.code === 0xe0 && segment.length >= 12 && latin1(segment.subarray(0, 5)) === 'JFIF\0') {
      resolution = jfifResolution(segment)
    } else if (marker.code === 0xe1 && latin1(segment.subarray(0, 6)) === 'Exif\0\0') {
      const exif = await readExif(segment.subarray(6))
      exifResolution = exif.resolution
      notes.push(...orientationNotes(exif.orientation))
    }
    at = end
    if (marker.code === 0xda) {
      if (!frame) throw damaged('JPEG', marker.at, 'has image data before its frame header')
      at = await skipEntropyCoded(source, end)
      essential.at(-1)!.to = at
      scans++
    }
  }
  if (!frame || scans === 0) throw damaged('JPEG', at, 'ends before any image data')
  const { width, height, components, leastBits } = frame
  checkDimensions(width, height, whole)
  checkLength(leastBits, essential, width, height)
  return {
    width,
    height,
    channels: components as 1 | 3,
    essential: merge(essential),
    resolution: resolution ?? exifResolution,
    notes,
  }
}

/** The next marker at or after a byte; fill bytes 0xff before it are allowed. */
async function readMarker(source: ByteSource, from: number): Promise<{ code: number; at: number }> {
  for (let at = from; ; at++) {
    if (at + 2 > source.size) throw missingEnd(source)
    const [prefix, code] = await source.read(at, 2)
    if (prefix !== 0xff) throw damaged('JPEG', prefix, `has no marker at byte ${at} where one must stand`)
    if (code !== 0xff) return { code, at }
  }
}

async function readSegment(source: ByteSource, at: number, code: number): Promise<Uint8Array> {
  if (at + 2 > source.size) throw missingEnd(source)
  const [high, low] = await source.read(at, 2)
  const length = (high << 8) | low
  if (length < 2) throw damaged('JPEG', length, `has a segment of ${length} bytes at byte ${at}`)
  if (at + length > source.size) {
    throw cutShort(`the JPEG segment 0x${code.toString(16)} at byte ${at}`, at + length, source.size)
  }
  return source.read(at + 2, length - 2)
}

/** The byte of the first marker that ends entropy-coded data: not a stuffed 0xff00, not a restart marker. */
async function skipEntropyCoded(source: ByteSource, from: number): Promise<number> {
  for (let start = from; start < source.size;) {
    const bytes = await source.read(start, Math.min(windowBytes, source.size - start))
    for (let i = bytes.indexOf(0xff); i >= 0 && i + 1 < bytes.length; i = bytes.indexOf(0xff, i + 1)) {
      const code = bytes[i + 1]
      if (code !== 0 && code !== 0xff && !(code >= 0xd0 && code <= 0xd7)) return start + i
    }
    // The last byte of a window may be the first half of a marker: look at it again.
    start += bytes.length > 1 ? bytes.length - 1 : 1
    if (bytes.length < 2) break
  }
  throw missingEnd(source)
}

function readFrame(segment: Uint8Array, code: number): Frame {
  const components = segment[5]
  if (segment.length < 6 || segment.length < 6 + 3 * components) {
    throw damaged('JPEG frame header', segment.length, `is ${segment.length} bytes long, too short`)
  }
  const height = (segment[1] << 8) | segment[2]
  const width = (segment[3] << 8) | segment[4]
  if (code > 0xc2) {
    throw new Fault(
      'unsupported',
      'JPEG coding',
      code,
      'the JPEG is coded lossless, hierarchical or arithmetic, which is not read. Save it again as a baseline JPEG, PNG or TIFF.',
    )
  }
  if (segment[0] !== 8) {
    throw new Fault(
      'unsupported',
      'JPEG precision',
      segment[0],
      `the JPEG has ${segment[0]} bits a sample; 8 are read. Save it again as a 16-bit PNG or TIFF.`,
    )
  }
  if (components === 4) {
    throw new Fault(
      'unsupported',
      'JPEG colours',
      components,
      'the JPEG is in CMYK (four printing inks), which has no scan intensities. Save the original again in RGB or grey.',
    )
  }
  if (components !== 1 && components !== 3) {
    throw new Fault(
      'unsupported',
      'JPEG colours',
      components,
      `the JPEG has ${components} colour components; 1 (grey) or 3 (colour) are read. Save it again in RGB or grey.`,
    )
  }
  return { width, height, components, leastBits: leastBits(segment, width, height, code) }
}

/**
 * Every block of 8 x 8 coefficients takes at least one bit for its DC code (T.81, F.1.2.1) and, in sequential coding,
 * one for its end of block. A header that states more blocks than the data could hold is refused before decoding.
 */
function leastBits(segment: Uint8Array, width: number, height: number, code: number): number {
  const components = segment[5]
  const sampling = Array.from({ length: components }, (_, i) => segment[7 + 3 * i])
  const across = Math.max(...sampling.map((factor) => factor >> 4))
  const down = Math.max(...sampling.map((factor) => factor & 15))
  if (sampling.some((factor) => factor >> 4 === 0 || (factor & 15) === 0)) {
    throw damaged('JPEG frame header', sampling[0], 'states a sampling factor of 0')
  }
  const blocks = sampling.reduce((sum, factor) => {
    const columns = Math.ceil((width * (factor >> 4)) / across / 8)
    const rows = Math.ceil((height * (factor & 15)) / down / 8)
    return sum + columns * rows
  }, 0)
  return blocks * (code === 0xc2 ? 1 : 2)
}

function checkLength(leastBits: number, essential: JpegLayout['essential'], width: number, height: number): void {
  const bytes = essential.reduce((sum, { from, to }) => sum + to - from, 0)
  if (!(bytes * 8 >= leastBits)) {
    throw damaged(
      'JPEG',
      bytes,
      `holds ${bytes} bytes of image data, too few for the ${width} x ${height} pixels it states`,
    )
  }
}

function isFrame(code: number): boolean {
  return code >= 0xc0 && code <= 0xcf && code !== 0xc4 && code !== 0xc8 && code !== 0xcc
}

/** Colour profiles, Exif and comments: left away before decoding, so that no decoder turns the picture or its colours. */
function isMetadata(code: number, segment: Uint8Array): boolean {
  if (code === 0xee) return latin1(segment.subarray(0, 5)) !== 'Adobe'
  return code === 0xfe || (code >= 0xe1 && code <= 0xef)
}

function merge(ranges: JpegLayout['essential']): JpegLayout['essential'] {
  const merged: JpegLayout['essential'] = []
  for (const range of ranges) {
    const last = merged.at(-1)
    if (last?.to === range.from) last.to = range.to
    else merged.push({ ...range })
  }
  return merged
}

function missingEnd(source: ByteSource): Fault {
  return new Fault(
    'unreadable',
    'file',
    source.size,
    `the file is cut short: it ends at byte ${source.size} before the end-of-image marker of the JPEG. Copy it again from its source.`,
  )
}
