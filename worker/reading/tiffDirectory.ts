import { Fault } from '../check.ts'
import { cutShort } from './bytes.ts'
import type { ByteSource } from './scanFile.ts'

/** One field of a directory: `count` values of a TIFF type, standing at byte `at` of the file. */
export interface TiffField {
  type: number
  count: number
  at: number
}

/** An image file directory (IFD): fields by tag, and where the next directory of the chain stands (0: none). */
export interface TiffDirectory {
  offset: number
  fields: Map<number, TiffField>
  next: number
}

/** The frame of a TIFF 6.0 or BigTIFF file: byte order, width of its offsets and the first directory. */
export interface TiffFrame {
  source: ByteSource
  littleEndian: boolean
  big: boolean
  first: number
}

/** Bytes of one value, by TIFF type (TIFF 6.0, section 2; 13 to 18 from the TIFF supplements and BigTIFF). */
const typeSizes: Partial<Record<number, number>> = {
  1: 1, 2: 1, 3: 2, 4: 4, 5: 8, 6: 1, 7: 1, 8: 2, 9: 4, 10: 8, 11: 4, 12: 8, 13: 4, 16: 8, 17: 8, 18: 8,
} // prettier-ignore

/** More fields than any writer puts into a directory; a larger count is a damaged file. */
const mostFields = 4096

export async function readFrame(source: ByteSource): Promise<TiffFrame> {
  if (source.size < 8) throw cutShort('the TIFF header', 8, source.size)
  const head = await source.read(0, 8)
  const littleEndian = head[0] === 0x49
  const view = viewOf(head)
  if (view.getUint16(2, littleEndian) !== 43) {
    return { source, littleEndian, big: false, first: view.getUint32(4, littleEndian) }
  }
  if (source.size < 16) throw cutShort('the BigTIFF header', 16, source.size)
  if (view.getUint16(4, littleEndian) !== 8) {
    throw damaged('BigTIFF header', view.getUint16(4, littleEndian), 'states an offset size other than 8')
  }
  const first = Number(viewOf(await source.read(8, 8)).getBigUint64(0, littleEndian))
  return { source, littleEndian, big: true, first }
}

/** The directory at a byte offset. What its fields point to is read only when asked for. */
export async function readDirectory(frame: TiffFrame, offset: number): Promise<TiffDirectory> {
  const { source, littleEndian, big } = frame
  const countSize = big ? 8 : 2
  const fieldSize = big ? 20 : 12
  const linkSize = big ? 8 : 4
  if (!(offset >= 8)) throw damaged('TIFF directory', offset, 'is said to stand inside the header')
  const place = `the TIFF directory at byte ${offset}`
  if (!(offset + countSize <= source.size)) throw cutShort(place, offset + countSize, source.size)
  const head = viewOf(await source.read(offset, countSize))
  const count = big ? Number(head.getBigUint64(0, littleEndian)) : head.getUint16(0, littleEndian)
  if (!(count >= 1 && count <= mostFields)) throw damaged(place, count, `holds ${count} fields`)
  const end = offset + countSize + count * fieldSize
  if (!(end <= source.size)) throw cutShort(place, end, source.size)
  const linkAt = Math.min(linkSize, source.size - end)
  const view = viewOf(await source.read(offset + countSize, count * fieldSize + linkAt))
  const fields = new Map<number, TiffField>()
  for (let i = 0; i < count; i++) {
    const field = readField(view, i * fieldSize, offset + countSize, frame)
    if (field) fields.set(field.tag, field)
  }
  // A file that ends right after its last field lacks only the link to a further directory.
  const next = linkAt < linkSize ? 0 : readOffset(view, count * fieldSize, frame)
  return { offset, fields, next }
}

/** One field; null for types we do not know, which TIFF 6.0 asks readers to skip. */
function readField(view: DataView, at: number, base: number, frame: TiffFrame): (TiffField & { tag: number }) | null {
  const { littleEndian, big } = frame
  const type = view.getUint16(at + 2, littleEndian)
  const size = typeSizes[type]
  if (size === undefined) return null
  const count = big ? Number(view.getBigUint64(at + 4, littleEndian)) : view.getUint32(at + 4, littleEndian)
  const valueAt = at + (big ? 12 : 8)
  const inside = count * size <= (big ? 8 : 4)
  return {
    tag: view.getUint16(at, littleEndian),
    type,
    count,
    at: inside ? base + valueAt : readOffset(view, valueAt, frame),
  }
}

/** All values of a field as numbers; rationals as quotients. Null where the directory has no such field. */
export async function readNumbers(
  frame: TiffFrame,
  directory: TiffDirectory,
  tag: number,
): Promise<Float64Array | null> {
  const field = directory.fields.get(tag)
  if (!field) return null
  const view = viewOf(await readValues(frame, field, tag))
  const values = new Float64Array(field.count)
  const size = typeSizes[field.type]!
  for (let i = 0; i < field.count; i++) values[i] = readValue(view, i * size, field.type, frame.littleEndian)
  return values
}

/** The first value of a field, or `otherwise` where there is none. */
export async function readNumber<T>(
  frame: TiffFrame,
  directory: TiffDirectory,
  tag: number,
  otherwise: T,
): Promise<number | T> {
  const field = directory.fields.get(tag)
  if (!field || field.count === 0) return otherwise
  const first = viewOf(await readValues(frame, { ...field, count: 1 }, tag))
  return readValue(first, 0, field.type, frame.littleEndian)
}

/** The bytes of a field as they stand in the file. */
export async function readBytes(frame: TiffFrame, directory: TiffDirectory, tag: number): Promise<Uint8Array | null> {
  const field = directory.fields.get(tag)
  return field ? readValues(frame, field, tag) : null
}

function readValues({ source }: TiffFrame, field: TiffField, tag: number): Promise<Uint8Array> {
  const length = field.count * typeSizes[field.type]!
  if (!(field.at + length <= source.size)) {
    throw cutShort(`the value of TIFF tag ${tag}`, field.at + length, source.size)
  }
  return source.read(field.at, length)
}

function readValue(view: DataView, at: number, type: number, littleEndian: boolean): number {
  switch (type) {
    case 3:
      return view.getUint16(at, littleEndian)
    case 4:
    case 13:
      return view.getUint32(at, littleEndian)
    case 5:
      return view.getUint32(at, littleEndian) / view.getUint32(at + 4, littleEndian)
    case 6:
      return view.getInt8(at)
    case 8:
      return view.getInt16(at, littleEndian)
    case 9:
      return view.getInt32(at, littleEndian)
    case 10:
      return view.getInt32(at, littleEndian) / view.getInt32(at + 4, littleEndian)
    case 11:
      return view.getFloat32(at, littleEndian)
    case 12:
      return view.getFloat64(at, littleEndian)
    case 16:
    case 18:
      return Number(view.getBigUint64(at, littleEndian))
    case 17:
      return Number(view.getBigInt64(at, littleEndian))
    default:
      return view.getUint8(at)
  }
}

function readOffset(view: DataView, at: number, { big, littleEndian }: TiffFrame): number {
  return big ? Number(view.getBigUint64(at, littleEndian)) : view.getUint32(at, littleEndian)
}

export function damaged(what: string, value: unknown, how: string): Fault {
  return new Fault('unreadable', what, value, `the file is damaged: ${what} ${how}. Copy it again from its source.`)
}

function viewOf(bytes: Uint8Array): DataView {
  return new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength)
}
