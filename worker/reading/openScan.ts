import { Fault } from '../check.ts'
import { samplesOf } from '../core/scan.ts'
import type { Progress } from '../work.ts'
import { browserDecoders } from './browserDecoders.ts'
import { DecodePool } from './decodePool.ts'
import { blobSource } from './bytes.ts'
import type { Decoders } from './decoders.ts'
import { describeScan } from './describe.ts'
import type { Description } from './describe.ts'
import { LevelledScan, MemoryPixels } from './levelledScan.ts'
import { prepareAdvice } from './limits.ts'
import type { PixelStore } from './pixelStore.ts'
import { decodePng } from './pngPixels.ts'
import type { ByteSource, Scan } from './scanFile.ts'
import { hashSource } from './sha256.ts'
import { decodeImage } from './tiffBlock.ts'
import { TiffPixels } from './tiffPixels.ts'
import { webpFile } from './webp.ts'

type OnProgress = (progress: Progress) => void

/**
 * Opens a scan in a browser: looks at its content (never only at its name), hashes it, and makes its samples readable.
 * TIFF stays on disk and is read block by block; PNG, JPEG and WebP are decoded once into memory.
 * Rejects with a Fault that says what is wrong with the file and what to do.
 */
export function openScan(file: Blob, name: string, onProgress?: OnProgress, signal?: AbortSignal): Promise<Scan> {
  return openScanWith(pooledDecoders, file, name, onProgress, signal)
}

const pooledDecoders: Decoders = { ...browserDecoders, pool: new DecodePool() }

/** A file that is hashed faster than a worker is started. */
const smallFile = 4 << 20

/** As `openScan`, with the platform's decoders given: for tests outside a browser. */
export async function openScanWith(
  decoders: Decoders,
  file: Blob,
  name: string,
  onProgress?: OnProgress,
  signal?: AbortSignal,
): Promise<Scan> {
  const source = blobSource(file)
  const description = await describeScan(source, name)
  signal?.throwIfAborted()
  const hashing =
    decoders.pool && file.size > smallFile
      ? decoders.pool.hash(file, onProgress, signal)
      : hashSource(source, onProgress, signal)
  // Decoding goes on beside the hashing where there is a thread for each; on one thread it comes after.
  if (description.format === 'png' && !decoders.pool) await hashing
  const opening = openPixels(description, source, file, decoders, onProgress, signal)
  const [sha256, store] = await Promise.all([hashing, opening])
  signal?.throwIfAborted()
  return new LevelledScan(store, { ...description.info, sha256 })
}

async function openPixels(
  description: Description,
  source: ByteSource,
  file: Blob,
  decoders: Decoders,
  onProgress?: OnProgress,
  signal?: AbortSignal,
): Promise<PixelStore> {
  if (description.format === 'tiff') return new TiffPixels(source, description.layout, decoders)
  const { width, height, channels } = description.info
  try {
    if (description.format === 'png') {
      const samples = await decodePng(source, description.layout, onProgress, signal)
      return new MemoryPixels(samplesOf(samples, width, height, channels))
    }
    const shape = { width, height, channels: channels as 1 | 3 | 4 }
    const essential = essentialFile(description, file)
    return new MemoryPixels(samplesOf(await decodeImage(decoders, essential, shape), width, height, channels))
  } catch (error) {
    // Memory for the samples is asked for in one piece; a refusal is a RangeError.
    if (!(error instanceof RangeError)) throw error
    throw new Fault(
      'too-large',
      'memory',
      `${width} x ${height}`,
      `there is not enough memory for the ${width} x ${height} pixels of ${description.info.name}. ${prepareAdvice}`,
    )
  }
}

/** The file without what decoders might act on: colour profiles, orientation, comments. Slices, not copies. */
function essentialFile(description: Description & { format: 'jpeg' | 'webp' }, file: Blob): Blob {
  const parts = description.layout.essential.map(({ from, to }) => file.slice(from, to))
  return description.format === 'jpeg' ? new Blob(parts, { type: 'image/jpeg' }) : webpFile(description.layout, parts)
}
