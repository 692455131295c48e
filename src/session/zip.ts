/**
 * Zip archives (APPNOTE 6.3.10, without zip64, encryption and spanning), written so that equal content has equal bytes and
 * read with distrust: sizes, places and checksums are all checked before anything is believed.
 *
 * Exports: `writeZip(members)` -> Blob, `readDirectory(file, limitOf)` -> entries, `readEntry(file, entry)` -> bytes,
 * `entryBlob(file, entry)` -> Blob (a stored entry, without reading it into memory).
 */
import { deflateSync, Inflate } from 'fflate'
import { Fault } from '../../worker/check.ts'
import { crc32 } from '../document/crc32.ts'

/** Text is deflated; a Blob, a scan already compressed by its own format, is stored as it is. */
export interface ZipMember {
  name: string
  content: Uint8Array<ArrayBuffer> | Blob
}

export interface ZipEntry {
  name: string
  method: 'stored' | 'deflated'
  crc: number
  compressedSize: number
  size: number
  /** Where its local header begins. */
  offset: number
}

const localSignature = 0x04034b50
const centralSignature = 0x02014b50
const endSignature = 0x06054b50
/** 1980-01-01 00:00, the first day zip knows: the time of saving must not change the bytes. */
const fixedDate = 0x0021
const utf8Flag = 0x0800
const mostBytes = 0xffffffff
const mostEntries = 10_000
/** All deflated members together, bytes. */
const mostUnfolded = 512e6
const endLength = 22
const localLength = 30
const centralLength = 46

/** A header of 16-bit and 32-bit numbers, little-endian, in the order given. */
function header(...fields: readonly (readonly [bytes: 2 | 4, value: number])[]): Uint8Array<ArrayBuffer> {
  const view = new DataView(new ArrayBuffer(fields.reduce((sum, [bytes]) => sum + bytes, 0)))
  let at = 0
  for (const [bytes, value] of fields) {
    if (bytes === 2) view.setUint16(at, value, true)
    else view.setUint32(at, value, true)
    at += bytes
  }
  return new Uint8Array(view.buffer)
}

async function crcOfBlob(blob: Blob): Promise<number> {
  let crc = 0
  const window = 4 << 20
  for (let at = 0; at < blob.size; at += window) {
    crc = crc32(new Uint8Array(await blob.slice(at, at + window).arrayBuffer()), crc)
  }
  return crc
}

/** The archive of these members, in this order. Rejects with a Fault beyond 4 GB. */
export async function writeZip(members: readonly ZipMember[]): Promise<Blob> {
  const parts: BlobPart[] = []
  const central: Uint8Array<ArrayBuffer>[] = []
  let offset = 0
  for (const { name, content } of members) {
    const stored = content instanceof Blob
    const crc = stored ? await crcOfBlob(content) : crc32(content)
    const data = stored ? content : deflateSync(content, { level: 6 })
    const dataSize = data instanceof Blob ? data.size : data.length
    const size = content instanceof Blob ? content.size : content.length
    const nameBytes = new TextEncoder().encode(name)
    const common = [
      [2, 20],
      [2, utf8Flag],
      [2, stored ? 0 : 8],
      [2, 0],
      [2, fixedDate],
      [4, crc],
      [4, dataSize],
      [4, size],
      [2, nameBytes.length],
      [2, 0],
    ] as const
    parts.push(header([4, localSignature], ...common), nameBytes, data)
    // Comment, disk, internal and external attributes: none.
    central.push(
      header([4, centralSignature], [2, 20], ...common, [2, 0], [2, 0], [2, 0], [4, 0], [4, offset]),
      nameBytes,
    )
    offset += localLength + nameBytes.length + dataSize
    if (!(offset < mostBytes)) throw tooLarge(offset)
  }
  const centralSize = central.reduce((sum, part) => sum + part.length, 0)
  const count = members.length
  const end = header([4, endSignature], [2, 0], [2, 0], [2, count], [2, count], [4, centralSize], [4, offset], [2, 0])
  return new Blob([...parts, ...central, end], { type: 'application/zip' })
}

function tooLarge(bytes: number): Fault {
  const message = `a project file must stay below 4 GB; with these scans it has more than ${(bytes / 1e9).toFixed(1)} GB. Save it without the scans`
  return new Fault('too-large', 'project file', bytes, message)
}

async function bytesAt(file: Blob, from: number, to: number): Promise<Uint8Array<ArrayBuffer>> {
  return new Uint8Array(await file.slice(from, to).arrayBuffer())
}

function damaged(rule: string): Fault {
  return new Fault('unreadable', 'project file', rule, `this project file is damaged: ${rule}. Nothing was opened`)
}

/** Finds the end record, searching back over a possible comment; refuses what is no zip and what is cut off. */
async function readEnd(file: Blob) {
  const from = Math.max(0, file.size - endLength - 0xffff)
  const tail = await bytesAt(file, from, file.size)
  const view = new DataView(tail.buffer)
  for (let at = tail.length - endLength; at >= 0; at--) {
    if (view.getUint32(at, true) !== endSignature) continue
    if (at + endLength + view.getUint16(at + 20, true) !== tail.length) continue
    return {
      at: from + at,
      disks: view.getUint16(at + 4, true) + view.getUint16(at + 6, true),
      entries: view.getUint16(at + 10, true),
      size: view.getUint32(at + 12, true),
      offset: view.getUint32(at + 16, true),
    }
  }
  const begin = await bytesAt(file, 0, 4)
  if (begin.length === 4 && new DataView(begin.buffer).getUint32(0, true) === localSignature) {
    const message = 'this project file is cut off: its end is missing. Copy or download it again; nothing was opened'
    throw new Fault('unreadable', 'project file', file.size, message)
  }
  const message =
    file.size === 0
      ? 'this file is empty, not a Winterclay project file'
      : 'this file is not a Winterclay project file (it is not a zip archive)'
  throw new Fault('format', 'project file', file.size, message)
}

/**
 * The entries of an archive, in the order of its directory. `limitOf` says how many bytes an entry of a name may have at
 * most, or null for a name that has no business there.
 */
export async function readDirectory(file: Blob, limitOf: (name: string) => number | null): Promise<ZipEntry[]> {
  const end = await readEnd(file)
  if (end.disks !== 0) throw damaged('it is one part of a zip archive in several parts')
  if (end.entries > mostEntries) throw damaged(`it has ${end.entries} members, more than ${mostEntries}`)
  if (end.offset + end.size > end.at) throw damaged('its directory lies beyond its end')
  const directory = await bytesAt(file, end.offset, end.offset + end.size)
  const entries: ZipEntry[] = []
  let at = 0
  for (let i = 0; i < end.entries; i++) {
    const { entry, length } = readCentral(directory, at)
    checkEntry(entry, limitOf)
    entries.push(entry)
    at += length
  }
  const unfolded = entries.reduce((sum, { method, size }) => sum + (method === 'deflated' ? size : 0), 0)
  if (unfolded > mostUnfolded) throw damaged(`its members say they unfold to ${unfolded} bytes, more than is allowed`)
  if (at !== directory.length) throw damaged('its directory is longer than its entries')
  checkPlaces(entries, end.offset)
  return entries
}

function readCentral(directory: Uint8Array<ArrayBuffer>, at: number): { entry: ZipEntry; length: number } {
  if (at + centralLength > directory.length) throw damaged('its directory ends in the middle of an entry')
  const view = new DataView(directory.buffer, at)
  if (view.getUint32(0, true) !== centralSignature) throw damaged('its directory has something else than an entry')
  const nameLength = view.getUint16(28, true)
  const length = centralLength + nameLength + view.getUint16(30, true) + view.getUint16(32, true)
  if (at + length > directory.length) throw damaged('its directory ends in the middle of an entry')
  const name = decodeName(directory.subarray(at + centralLength, at + centralLength + nameLength))
  const method = view.getUint16(10, true)
  if (view.getUint16(8, true) & 1) throw damaged(`${name} is encrypted`)
  if (method !== 0 && method !== 8) throw damaged(`${name} is compressed in a way (${method}) that is not read here`)
  const entry: ZipEntry = {
    name,
    method: method === 0 ? 'stored' : 'deflated',
    crc: view.getUint32(16, true),
    compressedSize: view.getUint32(20, true),
    size: view.getUint32(24, true),
    offset: view.getUint32(42, true),
  }
  return { entry, length }
}

function decodeName(bytes: Uint8Array): string {
  try {
    return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes)
  } catch {
    throw damaged('the name of a member is not UTF-8')
  }
}

function checkEntry({ name, size, compressedSize, method }: ZipEntry, limitOf: (name: string) => number | null): void {
  const limit = limitOf(name)
  if (limit === null) {
    const message = `this is not a Winterclay project file: it has a member named ${JSON.stringify(name.slice(0, 100))}. Nothing was opened`
    throw new Fault('format', 'project file', name, message)
  }
  if (size > limit) {
    const message = `${name} in this project file says it holds ${size} bytes, more than the ${limit} allowed. Nothing was opened`
    throw new Fault('too-large', name, size, message)
  }
  if (method === 'stored' && size !== compressedSize) throw damaged(`${name} has two different lengths`)
}

/** Members must not share bytes (a small file could unfold into a huge one), bear one name twice, or leave the file. */
function checkPlaces(entries: readonly ZipEntry[], end: number): void {
  const names = new Set<string>()
  let free = 0
  for (const entry of entries.toSorted((a, b) => a.offset - b.offset)) {
    if (names.has(entry.name)) throw damaged(`it holds ${entry.name} twice`)
    names.add(entry.name)
    if (entry.offset < free) throw damaged(`${entry.name} overlaps another member`)
    free = entry.offset + localLength + entry.compressedSize
    if (free > end) throw damaged(`${entry.name} reaches beyond its end`)
  }
}

/** Where an entry's data lies; checks that its local header agrees with the directory. */
async function dataPlace(file: Blob, entry: ZipEntry): Promise<[from: number, to: number]> {
  const bytes = await bytesAt(file, entry.offset, entry.offset + localLength)
  const view = new DataView(bytes.buffer)
  if (bytes.length < localLength || view.getUint32(0, true) !== localSignature) {
    throw damaged(`${entry.name} is not where its directory says`)
  }
  const nameAt = entry.offset + localLength
  const nameLength = view.getUint16(26, true)
  if (decodeName(await bytesAt(file, nameAt, nameAt + nameLength)) !== entry.name) {
    throw damaged(`${entry.name} has another name in its place`)
  }
  const from = nameAt + nameLength + view.getUint16(28, true)
  return [from, from + entry.compressedSize]
}

/** Unfolds an entry, never further than its stated size; checks size and CRC. */
export async function readEntry(file: Blob, entry: ZipEntry): Promise<Uint8Array<ArrayBuffer>> {
  const [from, to] = await dataPlace(file, entry)
  const data = await bytesAt(file, from, to)
  if (data.length !== entry.compressedSize) throw damaged(`${entry.name} is cut off`)
  const bytes = entry.method === 'stored' ? data : inflate(entry, data)
  if (crc32(bytes) !== entry.crc) throw damaged(`${entry.name} does not fit its checksum`)
  return bytes
}

function inflate(entry: ZipEntry, data: Uint8Array): Uint8Array<ArrayBuffer> {
  const bytes = new Uint8Array(entry.size)
  const done = { length: 0, ended: false }
  const inflater = new Inflate((chunk, final) => {
    if (done.length + chunk.length > bytes.length) throw damaged(`${entry.name} unfolds to more than it says`)
    bytes.set(chunk, done.length)
    done.length += chunk.length
    done.ended = final
  })
  // Deflate unfolds to at most 1,032 times its size: in small pieces a lie about the size is found out early.
  const piece = 1 << 14
  try {
    for (let at = 0; at < data.length; at += piece) {
      inflater.push(data.subarray(at, at + piece), at + piece >= data.length)
    }
  } catch (error) {
    throw error instanceof Fault ? error : damaged(`${entry.name} cannot be unfolded`)
  }
  if (!done.ended || done.length !== bytes.length) throw damaged(`${entry.name} unfolds to less than it says`)
  return bytes
}

/** A stored entry as a part of the file, not read into memory but for its checksum. */
export async function entryBlob(file: Blob, entry: ZipEntry): Promise<Blob> {
  if (entry.method !== 'stored') throw damaged(`${entry.name} must be stored as it is`)
  const [from, to] = await dataPlace(file, entry)
  const blob = file.slice(from, to)
  if (blob.size !== entry.size) throw damaged(`${entry.name} is cut off`)
  if ((await crcOfBlob(blob)) !== entry.crc) throw damaged(`${entry.name} does not fit its checksum`)
  return blob
}
