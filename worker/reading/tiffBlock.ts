import { Fault } from '../check.ts'
import { memorySource } from './bytes.ts'
import type { Decoders } from './decoders.ts'
import { unpackDeflate } from './inflate.ts'
import { readJpegLayout } from './jpeg.ts'
import { unpackLzw } from './lzw.ts'
import { unpackPackBits } from './packBits.ts'
import { damaged } from './tiffDirectory.ts'
import { rowsOfBlock, storedRowBytes } from './tiffImage.ts'
import type { TiffImage } from './tiffImage.ts'

/** Samples of a block or of some of its rows, shape [rows, blockWidth, channels of a plane], row order. */
export type BlockSamples = Uint8Array | Uint16Array

/** Unpacks block `index` of an image from its bytes in the file. */
export async function decodeBlock(
  image: TiffImage,
  index: number,
  packed: Uint8Array,
  decoders: Decoders,
): Promise<BlockSamples> {
  const rows = rowsOfBlock(image, Math.floor((index % (image.across * image.down)) / image.across))
  if (image.compression === 'jpeg') return decodeJpegBlock(image, packed, rows, decoders)
  const length = storedRowBytes(image) * rows
  const plane = Math.floor(index / (image.across * image.down))
  return finishRows(image, await unpack(image, packed, length), plane)
}

function unpack(image: TiffImage, packed: Uint8Array, length: number): Uint8Array | Promise<Uint8Array> {
  switch (image.compression) {
    case 'lzw':
      return unpackLzw(packed, length)
    case 'packbits':
      return unpackPackBits(packed, length)
    case 'deflate':
      return unpackDeflate(packed, length)
    default:
      return packed.slice(0, length)
  }
}

/** Bytes of whole unpacked rows to samples: byte order, predictor, small samples, palette, white as 0. May work in place. */
export function finishRows(image: TiffImage, bytes: Uint8Array, plane: number): BlockSamples {
  const samples = image.planes > 1 ? 1 : image.samples
  const rowSamples = image.blockWidth * samples
  let values: BlockSamples = bytes
  if (image.storedBits === 16) values = sixteenBits(bytes, image.littleEndian)
  else if (image.storedBits < 8) values = spread(bytes, image, rowSamples)
  if (image.differences) undoDifferences(values, rowSamples, samples)
  if (image.palette) return applyPalette(values as Uint8Array, image.palette, image.channels)
  // In separate planes an alpha channel is a plane of its own.
  if (image.inverted && plane === 0) invert(values, image)
  return values
}

function sixteenBits(bytes: Uint8Array, littleEndian: boolean): Uint16Array {
  if (!littleEndian) {
    for (let i = 0; i + 1 < bytes.length; i += 2) {
      const high = bytes[i]
      bytes[i] = bytes[i + 1]
      bytes[i + 1] = high
    }
  }
  // A view where it is aligned: every machine that runs this is little-endian.
  return bytes.byteOffset % 2 === 0
    ? new Uint16Array(bytes.buffer, bytes.byteOffset, bytes.length >> 1)
    : new Uint16Array(bytes.slice().buffer)
}

/** Samples of 1, 2 or 4 bits, rows padded to whole bytes, to one byte each: grey over the full range, indices as they are. */
function spread(bytes: Uint8Array, image: TiffImage, rowSamples: number): Uint8Array {
  const { storedBits } = image
  const rowBytes = storedRowBytes(image)
  const rows = bytes.length / rowBytes
  const mask = (1 << storedBits) - 1
  const factor = image.palette ? 1 : 255 / mask
  const values = new Uint8Array(rows * rowSamples)
  for (let row = 0, to = 0; row < rows; row++) {
    for (let i = 0; i < rowSamples; i++) {
      const bit = i * storedBits
      values[to++] = ((bytes[row * rowBytes + (bit >> 3)] >> (8 - storedBits - (bit & 7))) & mask) * factor
    }
  }
  return values
}

/** Predictor 2 (TIFF 6.0, section 14): each sample is the sum of the differences so far, modulo its range. */
function undoDifferences(values: BlockSamples, rowSamples: number, samples: number): void {
  for (let row = 0; row < values.length; row += rowSamples) {
    const end = row + rowSamples
    if (samples === 3) {
      let [a, b, c] = [values[row], values[row + 1], values[row + 2]]
      for (let i = row + 3; i < end; i += 3) {
        // The mask keeps the sums small integers; the array takes them modulo its own range.
        values[i] = a = (a + values[i]) & 0xffff
        values[i + 1] = b = (b + values[i + 1]) & 0xffff
        values[i + 2] = c = (c + values[i + 2]) & 0xffff
      }
    } else {
      for (let i = row + samples; i < end; i++) values[i] += values[i - samples]
    }
  }
}

function applyPalette(indices: Uint8Array, palette: Uint8Array, channels: number): Uint8Array {
  const values = new Uint8Array(indices.length * channels)
  for (let i = 0, to = 0; i < indices.length; i++) {
    for (let channel = 0; channel < channels; channel++) values[to++] = palette[indices[i] * channels + channel]
  }
  return values
}

/** Turns grey round; an alpha sample beside it stays. */
function invert(values: BlockSamples, image: TiffImage): void {
  const most = image.bits === 16 ? 65535 : 255
  const step = image.planes > 1 ? 1 : image.samples
  for (let i = 0; i < values.length; i += step) values[i] = most - values[i]
}

/** The Adobe segment that says: the three components are red, green and blue (transform 0). */
const adobeRgb = Uint8Array.of(0xff, 0xee, 0, 14, 0x41, 0x64, 0x6f, 0x62, 0x65, 0, 100, 0, 0, 0, 0, 0)

async function decodeJpegBlock(
  image: TiffImage,
  packed: Uint8Array,
  rows: number,
  decoders: Decoders,
): Promise<Uint8Array> {
  const jpeg = joinJpeg(packed, image.jpegTables, image.jpegRgb)
  const layout = await readJpegLayout(memorySource(jpeg))
  const channels = image.planes > 1 || image.samples === 1 ? 1 : 3
  const { width, height } = layout
  if (width !== image.blockWidth || height < rows || height > image.blockHeight || layout.channels !== channels) {
    throw damaged(
      'JPEG block',
      `${width} x ${height}`,
      `is ${width} x ${height} pixels with ${layout.channels} channels where ${image.blockWidth} x ${rows} with ${channels} are needed`,
    )
  }
  const file = new Blob(layout.essential.map(({ from, to }) => jpeg.subarray(from, to)))
  const values = await decodeImage(decoders, file, { width, height, channels })
  const block = values.subarray(0, width * rows * channels)
  if (image.inverted) invert(block, image)
  return block
}

/** Decodes, or says in our words that the platform could not. */
export async function decodeImage(
  decoders: Decoders,
  file: Blob,
  shape: { width: number; height: number; channels: 1 | 3 | 4 },
): Promise<Uint8Array> {
  try {
    return await decoders.decodeImage(file, shape)
  } catch (error) {
    if (error instanceof Fault) throw error
    throw damaged('image data', `${shape.width} x ${shape.height}`, 'cannot be decoded')
  }
}

/** An abbreviated JPEG with the shared tables put before it (TIFF Technical Note 2). */
function joinJpeg(packed: Uint8Array, tables: Uint8Array | null, rgb: boolean): Uint8Array<ArrayBuffer> {
  const shared = tables && tables.length >= 4 ? tables.subarray(2, tables.length - 2) : new Uint8Array(0)
  const adobe = rgb ? adobeRgb : new Uint8Array(0)
  const joined = new Uint8Array(packed.length + adobe.length + shared.length)
  joined.set(packed.subarray(0, 2))
  joined.set(adobe, 2)
  joined.set(shared, 2 + adobe.length)
  joined.set(packed.subarray(2), 2 + adobe.length + shared.length)
  return joined
}
