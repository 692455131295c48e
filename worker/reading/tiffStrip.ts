import { inflatePieces } from './inflate.ts'
import { longestLzwString, LzwDecoder, tooShort } from './lzw.ts'
import { PackBitsDecoder } from './packBits.ts'
import type { ByteSource } from './scanFile.ts'
import { finishRows } from './tiffBlock.ts'
import type { BlockSamples } from './tiffBlock.ts'
import { damaged } from './tiffDirectory.ts'
import { rowsOfBlock, storedRowBytes } from './tiffImage.ts'
import type { TiffImage } from './tiffImage.ts'

/** Packed bytes held at once, however large the strip. */
const windowBytes = 1 << 20

/**
 * Unpacks one large strip from its first row to its last, a block (band of rows) at a time.
 * `first` is the index of the strip's first block in the image.
 */
export async function* bandsOfStrip(source: ByteSource, image: TiffImage, first: number): AsyncGenerator<BlockSamples> {
  const blocks = image.across * image.down
  const plane = Math.floor(first / blocks)
  const last = Math.min(first + image.partsOfStrip, (plane + 1) * blocks)
  const rowBytes = storedRowBytes(image)
  const lengths: number[] = []
  for (let index = first; index < last; index++) lengths.push(rowBytes * rowsOfBlock(image, index % blocks))
  const offset = image.offsets[first]
  const end = offset + image.byteCounts[first]
  for await (const band of unpackBands(source, image, offset, end, lengths)) yield finishRows(image, band, plane)
}

function unpackBands(
  source: ByteSource,
  image: TiffImage,
  offset: number,
  end: number,
  lengths: number[],
): AsyncGenerator<Uint8Array> {
  if (image.compression === 'lzw') return lzwBands(windows(source, offset, end), lengths)
  if (image.compression === 'packbits') return packBitsBands(windows(source, offset, end), lengths)
  return deflateBands(windows(source, offset, end), lengths)
}

async function* windows(source: ByteSource, offset: number, end: number): AsyncGenerator<Uint8Array> {
  for (let at = offset; at < end; at += windowBytes) yield source.read(at, Math.min(windowBytes, end - at))
}

async function* lzwBands(packed: AsyncGenerator<Uint8Array>, lengths: number[]): AsyncGenerator<Uint8Array> {
  const decoder = new LzwDecoder(new Uint8Array(lengths[0] + longestLzwString))
  let band = 0
  for await (const input of packed) {
    for (let at = 0; ;) {
      at = decoder.decode(input, at, input.length, lengths[band])
      if (decoder.filled - decoder.taken < lengths[band]) break
      yield decoder.take(lengths[band], lengths[band + 1] ?? 0)
      if (++band === lengths.length) return
    }
    if (decoder.finished) break
  }
  throw tooShort('LZW', decoder.filled - decoder.taken, lengths[band])
}

async function* packBitsBands(packed: AsyncGenerator<Uint8Array>, lengths: number[]): AsyncGenerator<Uint8Array> {
  const decoder = new PackBitsDecoder(new Uint8Array(lengths[0]))
  let band = 0
  for await (const input of packed) {
    for (let at = 0; ;) {
      at = decoder.decode(input, at, input.length, lengths[band])
      if (decoder.filled < lengths[band]) break
      yield decoder.output
      if (++band === lengths.length) return
      decoder.output = new Uint8Array(lengths[band])
      decoder.filled = 0
    }
  }
  throw tooShort('PackBits', decoder.filled, lengths[band])
}

async function* deflateBands(packed: AsyncGenerator<Uint8Array>, lengths: number[]): AsyncGenerator<Uint8Array> {
  let band = new Uint8Array(lengths[0])
  let filled = 0
  let count = 0
  try {
    for await (const piece of inflatePieces(streamOf(packed))) {
      for (let at = 0; at < piece.length;) {
        const part = piece.subarray(at, at + band.length - filled)
        band.set(part, filled)
        filled += part.length
        at += part.length
        if (filled < band.length) continue
        yield band
        if (++count === lengths.length) return
        band = new Uint8Array(lengths[count])
        filled = 0
      }
    }
  } catch {
    throw damaged('Deflate data', filled, `breaks off or is garbled in band ${count + 1} of ${lengths.length}`)
  }
  throw tooShort('Deflate', filled, band.length)
}

/** A byte stream that reads on only when it is asked to. */
export function streamOf(pieces: AsyncGenerator<Uint8Array>): ReadableStream<Uint8Array<ArrayBuffer>> {
  return new ReadableStream({
    async pull(controller) {
      const next = await pieces.next()
      if (next.done) controller.close()
      else controller.enqueue(next.value as Uint8Array<ArrayBuffer>)
    },
    async cancel() {
      await pieces.return(undefined)
    },
  })
}
