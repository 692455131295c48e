import { createHash } from 'node:crypto'
import { open } from 'node:fs/promises'
import type { FileHandle } from 'node:fs/promises'
import { basename } from 'node:path'
import { Fault } from '../../worker/check.ts'
import { describeScan } from '../../worker/reading/describe.ts'
import { LevelledScan } from '../../worker/reading/levelledScan.ts'
import type { ByteSource, Scan } from '../../worker/reading/scanFile.ts'
import { SharpPixels } from './sharpPixels.ts'

/**
 * Opens a scan by its path, to be read with sharp. The headers are read and checked by the same code as in the page, so that
 * size, resolution, levels, notes and the words for a bad file are the same; only the decoding is sharp's.
 */
export async function openSharpScan(path: string): Promise<Scan> {
  const handle = await openFile(path)
  try {
    const { size } = await handle.stat()
    const description = await describeScan(fileSource(handle, size), basename(path))
    const sha256 = await hashFile(handle)
    return new LevelledScan(new SharpPixels(path, description), { ...description.info, sha256 })
  } finally {
    await handle.close()
  }
}

async function openFile(path: string): Promise<FileHandle> {
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

function fileSource(handle: FileHandle, size: number): ByteSource {
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
