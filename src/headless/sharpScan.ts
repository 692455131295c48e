import { createHash } from 'node:crypto'
import { open } from 'node:fs/promises'
import type { FileHandle } from 'node:fs/promises'
import { basename } from 'node:path'
import { Fault } from '../../worker/check.ts'
import { describeScan } from '../../worker/reading/describe.ts'
import type { Description } from '../../worker/reading/describe.ts'
import { LevelledScan } from '../../worker/reading/levelledScan.ts'
import type { ByteSource, Scan } from '../../worker/reading/scanFile.ts'
import type { TiffLayout } from '../../worker/reading/tiff.ts'
import { TiffPixels } from '../../worker/reading/tiffPixels.ts'
import { sharpDecoders } from './sharpDecoders.ts'
import { SharpPixels } from './sharpPixels.ts'

/**
 * Opens a scan by its path, to be read with sharp. The headers are read and checked by the same code as in the page, so that
 * size, resolution, levels, notes and the words for a bad file are the same; only the decoding is sharp's.
 */
export async function openSharpScan(path: string): Promise<Scan> {
  const handle = await openFile(path)
  try {
    const source = fileSource(handle, (await handle.stat()).size)
    const description = await describeScan(source, basename(path))
    const info = { ...description.info, sha256: await hashFile(handle) }
    if (misreadBySharp(description)) return new LevelledScan(new OwnPixels(handle, source, description.layout), info)
    await handle.close()
    return new LevelledScan(new SharpPixels(path, description), info)
  } catch (error) {
    await handle.close()
    throw error
  }
}

/** libvips refuses or garbles separate planes and divides premultiplied colours by their alpha; our own reader does neither. */
export function misreadBySharp(description: Description): description is Description & { format: 'tiff' } {
  if (description.format !== 'tiff') return false
  const { planes, premultiplied } = description.layout.levels[0].image
  return planes > 1 || premultiplied
}

/** A TIFF read by the page's reader; the file stays open until the scan is closed. */
class OwnPixels extends TiffPixels {
  private readonly handle: FileHandle

  constructor(handle: FileHandle, source: ByteSource, layout: TiffLayout) {
    super(source, layout, sharpDecoders)
    this.handle = handle
  }

  override close(): void {
    super.close()
    void this.handle.close()
  }
}

export async function openFile(path: string): Promise<FileHandle> {
  let handle: FileHandle
  try {
    handle = await open(path)
  } catch (error) {
    const missing = error instanceof Error && 'code' in error && error.code === 'ENOENT'
    throw new Fault(
      'unreadable',
      'file',
      path,
      `${path} ${missing ? 'does not exist' : 'cannot be opened'}. Check the path and the rights to it.`,
    )
  }
  if ((await handle.stat()).isFile()) return handle
  await handle.close()
  throw new Fault('unreadable', 'file', path, `${path} is not a file. Name the scan itself.`)
}

export function fileSource(handle: FileHandle, size: number): ByteSource {
  return {
    size,
    async read(offset, length) {
      const bytes = new Uint8Array(length)
      const { bytesRead } = await handle.read(bytes, 0, length, offset)
      if (bytesRead === length) return bytes
      throw new Fault(
        'unreadable',
        'file',
        offset,
        `the file ended at byte ${offset + bytesRead} while it was read: was it changed? Open it again.`,
      )
    },
  }
}

async function hashFile(handle: FileHandle): Promise<string> {
  const hash = createHash('sha256')
  for await (const bytes of handle.createReadStream({ start: 0, autoClose: false, highWaterMark: 1 << 20 })) {
    hash.update(bytes as Buffer)
  }
  return hash.digest('hex')
}
