import { describe, Fault } from '../check.ts'
import { readUpTo } from './bytes.ts'
import type { ByteSource, ScanFormat } from './scanFile.ts'

const formatNames: Record<ScanFormat, string> = { png: 'PNG', jpeg: 'JPEG', webp: 'WebP', tiff: 'TIFF' }

const endings: Record<ScanFormat, string[]> = {
  png: ['png'],
  jpeg: ['jpg', 'jpeg', 'jpe', 'jfif'],
  webp: ['webp'],
  tiff: ['tif', 'tiff', 'btf', 'tf8', 'ptif'],
}

/** Signatures as Latin-1 text at a byte offset; the first that fits decides. */
const signatures: { format: ScanFormat; at: number; text: string }[] = [
  { format: 'png', at: 0, text: '\x89PNG\r\n\x1a\n' },
  { format: 'jpeg', at: 0, text: '\xff\xd8\xff' },
  { format: 'webp', at: 8, text: 'WEBP' },
  { format: 'tiff', at: 0, text: 'II*\0' },
  { format: 'tiff', at: 0, text: 'MM\0*' },
  { format: 'tiff', at: 0, text: 'II+\0' },
  { format: 'tiff', at: 0, text: 'MM\0+' },
]

/** Kinds of file that people do offer as scans and that are not read here. */
const strangers: { at: number; text: string; what: string }[] = [
  { at: 0, text: 'GIF8', what: 'a GIF image' },
  { at: 0, text: 'BM', what: 'a BMP image' },
  { at: 0, text: '%PDF', what: 'a PDF document' },
  { at: 0, text: '8BPS', what: 'a PSD image' },
  { at: 4, text: 'jP  ', what: 'a JPEG 2000 image' },
  { at: 4, text: 'JXL ', what: 'a JPEG XL image' },
  { at: 4, text: 'ftyp', what: 'an HEIC or AVIF image or a film' },
  { at: 0, text: 'PK\x03\x04', what: 'a zip archive' },
  { at: 128, text: 'DICM', what: 'a DICOM image' },
]

/** What a file is by its first bytes, never by its name; a name that disagrees is worth a note. */
export async function sniff(source: ByteSource, name: string): Promise<{ format: ScanFormat; notes: string[] }> {
  if (source.size === 0) {
    throw new Fault('format', 'file', 0, `${name} is empty (0 bytes). Copy it again from its source.`)
  }
  const head = latin1(await readUpTo(source, 0, 132))
  const match = signatures.find(({ at, text }) => head.startsWith(text, at))
  if (!match || (match.format === 'webp' && !head.startsWith('RIFF'))) throw notAScan(head, name)
  return { format: match.format, notes: disagreement(match.format, name) }
}

function notAScan(head: string, name: string): Fault {
  const stranger = strangers.find(({ at, text }) => head.startsWith(text, at))
  const advice = 'Scans are read as PNG, JPEG, WebP or TIFF.'
  if (stranger)
    return new Fault('unsupported', 'file', name, `${name} is ${stranger.what}, which is not read. ${advice}`)
  const start = head.slice(0, 12).replace(/[^\x20-\x7e]/g, '.')
  return new Fault('format', 'file', name, `${name} is not a picture: it begins with ${describe(start)}. ${advice}`)
}

function disagreement(format: ScanFormat, name: string): string[] {
  const ending = /\.([^./\\]+)$/.exec(name)?.[1].toLowerCase()
  if (ending === undefined || endings[format].includes(ending)) return []
  return [`named .${ending}, but it is a ${formatNames[format]} by its content and read as such`]
}

/** Bytes as characters of the same code: for comparing signatures. */
export function latin1(bytes: Uint8Array): string {
  return String.fromCharCode(...bytes)
}
