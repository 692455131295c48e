import { Fault } from '../check.ts'
import { cutShort } from './bytes.ts'
import { checkDimensions, mostBytesBlock } from './limits.ts'
import { bestDeflateRatio } from './png.ts'
import { damaged, readBytes, readNumber, readNumbers } from './tiffDirectory.ts'
import type { TiffDirectory, TiffFrame } from './tiffDirectory.ts'
import { checkSampleKind, readColour } from './tiffColour.ts'
import type { TiffColour } from './tiffColour.ts'

export type TiffCompression = 'none' | 'lzw' | 'deflate' | 'packbits' | 'jpeg'

/**
 * One image of a TIFF, checked against its file. Its pixels lie in blocks (tiles, or strips as wide as the image):
 * `across` by `down` of them, in row order, and with separate planes one such grid after the other.
 */
export interface TiffImage extends TiffColour {
  width: number
  height: number
  compression: TiffCompression
  /** Whether samples are stored as differences to the left neighbour (predictor 2). */
  differences: boolean
  /** Planes stored apart: 1 for interleaved samples. */
  planes: number
  tiled: boolean
  blockWidth: number
  blockHeight: number
  across: number
  down: number
  /** Where each block stands in the file, bytes; one entry for each block of each plane. */
  offsets: Float64Array
  byteCounts: Float64Array
  /** How many blocks, one below the other, share one packed strip that is too large to be unpacked at once; else 1. */
  partsOfStrip: number
  littleEndian: boolean
  /** Tables shared by the JPEG blocks, as an abbreviated JPEG of their own. */
  jpegTables: Uint8Array | null
}

const compressions: Record<number, TiffCompression | undefined> = {
  1: 'none',
  5: 'lzw',
  7: 'jpeg',
  8: 'deflate',
  32773: 'packbits',
  32946: 'deflate',
}

const strangers: Record<number, string | undefined> = {
  2: 'CCITT fax', 3: 'CCITT fax', 4: 'CCITT fax', 6: 'the JPEG of TIFF 6.0 (old style)', 34712: 'JPEG 2000',
  34925: 'LZMA', 50000: 'Zstandard', 50001: 'WebP', 50002: 'JPEG XL',
} // prettier-ignore

/** Best ratios the codings can reach: a block said to unpack to more is refused before memory is taken for it. */
const bestRatios: Record<TiffCompression, number> = {
  none: 1,
  // Between two clears, 3,838 codes of 43,246 bits stand for strings of 1 to 3,838 bytes.
  lzw: 1400,
  deflate: bestDeflateRatio,
  packbits: 64,
  jpeg: Infinity,
}

/** Bytes, unpacked: strips above `whole` are streamed in bands if they are packed; uncompressed ones are read in parts. */
interface StripSizes {
  whole: number
  band: number
  part: number
}
const stripSizes: StripSizes = { whole: 16 << 20, band: 4 << 20, part: 1 << 20 }

/** Reads and checks one image directory. Every block of a checked image lies inside the file. */
export async function readTiffImage(frame: TiffFrame, directory: TiffDirectory): Promise<TiffImage> {
  const number = (tag: number, otherwise: number) => readNumber(frame, directory, tag, otherwise)
  const width = await number(256, 0)
  const height = await number(257, 0)
  checkDimensions(width, height, false)
  const compression = await readCompression(frame, directory)
  await checkSampleKind(frame, directory)
  const colour = await readColour(frame, directory, compression)
  const planar = await number(284, 1)
  if (planar !== 1 && planar !== 2) throw damaged('TIFF PlanarConfiguration', planar, `is ${planar}, not 1 or 2`)
  const fillOrder = await number(266, 1)
  if (fillOrder !== 1) {
    throw new Fault(
      'unsupported',
      'TIFF FillOrder',
      fillOrder,
      'the TIFF stores its bits in reversed order (FillOrder 2), which is not read. Save it again with LZW or Deflate compression.',
    )
  }
  const layout = await readBlocks(frame, directory, { width, height, planes: planar === 2 ? colour.samples : 1 })
  const image: TiffImage = {
    ...colour,
    ...layout,
    width,
    height,
    compression,
    differences: await readPredictor(frame, directory, compression, colour),
    partsOfStrip: 1,
    littleEndian: frame.littleEndian,
    jpegTables: compression === 'jpeg' ? await readBytes(frame, directory, 347) : null,
  }
  checkBlocks(image, frame.source.size)
  return inParts(image)
}

async function readCompression(frame: TiffFrame, directory: TiffDirectory): Promise<TiffCompression> {
  const code = await readNumber(frame, directory, 259, 1)
  const compression = compressions[code]
  if (compression) return compression
  const name = strangers[code] ?? `number ${code}`
  throw new Fault(
    'unsupported',
    'TIFF compression',
    code,
    `the TIFF is compressed by ${name}, which is not read. Save it again with LZW, Deflate or no compression.`,
  )
}

async function readPredictor(
  frame: TiffFrame,
  directory: TiffDirectory,
  compression: TiffCompression,
  colour: TiffColour,
): Promise<boolean> {
  const predictor = await readNumber(frame, directory, 317, 1)
  // Only LZW and Deflate know a predictor (TIFF 6.0, section 14); elsewhere the tag has no meaning.
  if (predictor === 1 || (compression !== 'lzw' && compression !== 'deflate')) return false
  if (predictor !== 2) {
    throw new Fault(
      'unsupported',
      'TIFF predictor',
      predictor,
      `the TIFF uses predictor ${predictor}; 1 and 2 are read. Save it again with LZW or Deflate compression.`,
    )
  }
  if (colour.storedBits < 8) {
    throw new Fault(
      'unsupported',
      'TIFF predictor',
      colour.storedBits,
      `the TIFF uses a predictor on samples of ${colour.storedBits} bits. Save it again with 8 or 16 bits.`,
    )
  }
  return true
}

type Blocks = Pick<
  TiffImage,
  'planes' | 'tiled' | 'blockWidth' | 'blockHeight' | 'across' | 'down' | 'offsets' | 'byteCounts'
>

async function readBlocks(
  frame: TiffFrame,
  directory: TiffDirectory,
  { width, height, planes }: { width: number; height: number; planes: number },
): Promise<Blocks> {
  const tiled = directory.fields.has(322) || directory.fields.has(324)
  const blockWidth = tiled ? await readNumber(frame, directory, 322, 0) : width
  const rows = await readNumber(frame, directory, tiled ? 323 : 278, tiled ? 0 : height)
  const blockHeight = tiled ? rows : Math.min(rows, height)
  if (!(blockWidth >= 1 && blockHeight >= 1 && blockWidth <= 1 << 20 && blockHeight <= 1 << 20)) {
    throw damaged('TIFF tile or strip size', `${blockWidth} x ${blockHeight}`, `is ${blockWidth} x ${blockHeight}`)
  }
  const across = Math.ceil(width / blockWidth)
  const down = Math.ceil(height / blockHeight)
  const count = across * down * planes
  const offsets = await readBlockField(
    frame,
    directory,
    tiled ? 324 : 273,
    count,
    tiled ? 'TileOffsets' : 'StripOffsets',
  )
  const byteCounts = await readBlockField(
    frame,
    directory,
    tiled ? 325 : 279,
    count,
    tiled ? 'TileByteCounts' : 'StripByteCounts',
  )
  return { planes, tiled, blockWidth, blockHeight, across, down, offsets, byteCounts }
}

async function readBlockField(
  frame: TiffFrame,
  directory: TiffDirectory,
  tag: number,
  count: number,
  name: string,
): Promise<Float64Array> {
  const stated = directory.fields.get(tag)?.count ?? 0
  if (stated < count) {
    throw damaged(`TIFF ${name}`, stated, `lists ${stated} of the ${count} parts that the image size asks for`)
  }
  const values = await readNumbers(frame, directory, tag)
  return values!.subarray(0, count)
}

/** Bytes of one unpacked row of a block. */
export function storedRowBytes(image: Pick<TiffImage, 'blockWidth' | 'planes' | 'samples' | 'storedBits'>): number {
  return Math.ceil((image.blockWidth * (image.planes > 1 ? 1 : image.samples) * image.storedBits) / 8)
}

/** Rows of a block: the last strip of an image may be shorter, tiles never are. */
export function rowsOfBlock(image: TiffImage, blockRow: number): number {
  return image.tiled ? image.blockHeight : Math.min(image.blockHeight, image.height - blockRow * image.blockHeight)
}

function checkBlocks(image: TiffImage, size: number): void {
  const { offsets, byteCounts, across, down, compression, tiled } = image
  const name = tiled ? 'tile' : 'strip'
  const rowBytes = storedRowBytes(image)
  if ((tiled || compression === 'jpeg') && !(rowBytes * image.blockHeight <= mostBytesBlock)) {
    throw damaged(
      `TIFF ${name} size`,
      `${image.blockWidth} x ${image.blockHeight}`,
      `is ${image.blockWidth} x ${image.blockHeight}, too large to be unpacked at once`,
    )
  }
  for (let i = 0; i < offsets.length; i++) {
    const end = offsets[i] + byteCounts[i]
    const what = `${name} ${i + 1} of ${offsets.length}`
    if (!(end <= size)) throw cutShort(what, end, size)
    const unpacked = rowBytes * rowsOfBlock(image, Math.floor((i % (across * down)) / across))
    if (!(byteCounts[i] * bestRatios[compression] >= unpacked) || byteCounts[i] === 0) {
      throw damaged(
        what,
        byteCounts[i],
        `holds ${byteCounts[i]} bytes, too few for the ${unpacked} bytes of its pixels`,
      )
    }
  }
}

/**
 * Tall strips seen as blocks of a few rows. Uncompressed, each block is a range of the file of its own; large packed
 * strips are unpacked as a stream that passes their blocks one after the other.
 */
export function inParts(image: TiffImage, sizes = stripSizes): TiffImage {
  const rowBytes = storedRowBytes(image)
  const packed = image.compression !== 'none'
  const small = packed && rowBytes * image.blockHeight <= sizes.whole
  if (small || image.tiled || image.compression === 'jpeg') return image
  const rows = rowsOfPart(image, Math.max(1, Math.floor((packed ? sizes.band : sizes.part) / rowBytes)))
  const partsOfStrip = Math.ceil(image.blockHeight / rows)
  if (partsOfStrip === 1) return image
  const down = Math.ceil(image.height / rows)
  const offsets = new Float64Array(down * image.planes)
  const byteCounts = new Float64Array(down * image.planes)
  for (let plane = 0; plane < image.planes; plane++) {
    for (let part = 0; part < down; part++) {
      const strip = plane * image.down + Math.floor(part / partsOfStrip)
      const skipped = packed ? 0 : (part % partsOfStrip) * rows * rowBytes
      offsets[plane * down + part] = image.offsets[strip] + skipped
      byteCounts[plane * down + part] = packed
        ? image.byteCounts[strip]
        : Math.min(rows, image.height - part * rows) * rowBytes
    }
  }
  return { ...image, blockHeight: rows, down, offsets, byteCounts, partsOfStrip: packed ? partsOfStrip : 1 }
}

/** Rows of a part, at most `most`: no part may straddle two strips. */
function rowsOfPart(image: TiffImage, most: number): number {
  if (image.down === 1 || most >= image.blockHeight) return Math.min(most, image.blockHeight)
  let rows = most
  while (image.blockHeight % rows !== 0) rows--
  return rows
}
