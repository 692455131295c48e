import { Fault } from '../check.ts'
import type { ByteSource } from './scanFile.ts'

/** Bytes of a picked or dropped file; only the asked-for slice is read from disk. */
export function blobSource(blob: Blob): ByteSource {
  return {
    size: blob.size,
    async read(offset, length) {
      checkRange(offset, length, blob.size)
      try {
        return new Uint8Array(await blob.slice(offset, offset + length).arrayBuffer())
      } catch {
        throw new Fault(
          'unreadable',
          'file',
          offset,
          'the file can no longer be read: it was changed, moved or deleted since it was chosen, or its disk is gone. Open it again.',
        )
      }
    },
  }
}

/** Bytes already in memory. The slices are views, not copies. */
export function memorySource(bytes: Uint8Array): ByteSource {
  return {
    size: bytes.length,
    read(offset, length) {
      checkRange(offset, length, bytes.length)
      return Promise.resolve(bytes.subarray(offset, offset + length))
    },
  }
}

/** What a reader says when the file ends before something that the file itself announces. */
export function cutShort(what: string, needed: number, size: number): Fault {
  return new Fault(
    'unreadable',
    'file',
    size,
    `the file is cut short: it ends at byte ${size}, but ${what} reaches to byte ${needed}. Copy it again from its source.`,
  )
}

/** As much as the file holds of the asked-for range: for places where less is an answer too. */
export function readUpTo(source: ByteSource, offset: number, length: number): Promise<Uint8Array> {
  const start = Math.min(offset, source.size)
  return source.read(start, Math.min(length, source.size - start))
}

function checkRange(offset: number, length: number, size: number): void {
  if (!(offset >= 0 && length >= 0 && offset + length <= size)) {
    throw cutShort(`a part of ${length} bytes at byte ${offset}`, offset + length, size)
  }
}

const pageBytes = 256 << 10
const mostPages = 8

/**
 * A source that reads small ranges from pages it keeps: headers and chunk lists are walked in steps of a few bytes, and each
 * read of its own would be a trip to the disk.
 */
export function pagedSource(source: ByteSource): ByteSource {
  const pages = new Map<number, Promise<Uint8Array>>()
  const page = (index: number): Promise<Uint8Array> => {
    const known = pages.get(index)
    if (known) return known
    const start = index * pageBytes
    const read = source.read(start, Math.min(pageBytes, source.size - start))
    pages.set(index, read)
    for (const oldest of pages.keys()) {
      if (pages.size <= mostPages) break
      pages.delete(oldest)
    }
    return read
  }
  return {
    size: source.size,
    async read(offset, length) {
      const first = Math.floor(offset / pageBytes)
      const inOnePage = length > 0 && offset + length <= Math.min((first + 1) * pageBytes, source.size)
      if (!inOnePage) return source.read(offset, length)
      const bytes = await page(first)
      return bytes.subarray(offset - first * pageBytes, offset - first * pageBytes + length)
    },
  }
}
