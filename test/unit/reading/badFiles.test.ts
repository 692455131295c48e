import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import sharp from 'sharp'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { openSharpScan } from '../../../src/headless/sharpScan.ts'
import { Fault } from '../../../worker/check.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import { laminated } from '../../fixtures/scanFiles.ts'
import { chunk, writePng } from '../../fixtures/writePng.ts'
import { writeTiff } from '../../fixtures/writeTiff.ts'
import type { TiffToWrite } from '../../fixtures/writeTiff.ts'

const width = 61
const height = 83
const colour = () => sharp(laminated(3, 8) as Uint8Array, { raw: { width, height, channels: 3 } })
const jpeg = await colour().jpeg().toBuffer()
const png = await colour().png().toBuffer()
const webp = await colour().webp().toBuffer()
const plainTiff: TiffToWrite = {
  width,
  height,
  samples: 1,
  bits: 8,
  data: laminated(1, 8),
  photometric: 1,
  rowsPerStrip: 10,
}
const tiff = writeTiff({ ...plainTiff, compression: 'lzw' })
const tiffWith = (fields: TiffToWrite['fields']) => writeTiff({ ...plainTiff, fields })

/** A JPEG whose frame header states other dimensions. */
function jpegOf(statedWidth: number, statedHeight: number): Buffer {
  const bytes = Buffer.from(jpeg)
  const frame = bytes.indexOf(Buffer.of(0xff, 0xc0, 0, 17, 8))
  bytes.writeUInt16BE(statedHeight, frame + 5)
  bytes.writeUInt16BE(statedWidth, frame + 7)
  return bytes
}

function pngOf(statedWidth: number, statedHeight: number): Buffer {
  const bytes = Buffer.from(png)
  const header = Buffer.from(bytes.subarray(16, 29))
  header.writeUInt32BE(statedWidth, 0)
  header.writeUInt32BE(statedHeight, 4)
  chunk('IHDR', header).copy(bytes, 8)
  return bytes
}

interface BadFile {
  what: string
  name: string
  bytes: Uint8Array
  says: string | RegExp
  code: string
}

const copyAgain = 'Copy it again from its source.'
const bad: BadFile[] = [
  {
    what: 'an empty file',
    name: 'core.tif',
    bytes: new Uint8Array(0),
    says: `core.tif is empty (0 bytes). ${copyAgain}`,
    code: 'format',
  },
  {
    what: 'text renamed .png',
    name: 'core.png',
    bytes: Buffer.from('Depth;Grey value\n0.1;123\n'),
    says: 'core.png is not a picture: it begins with "Depth;Grey v". Scans are read as PNG, JPEG, WebP or TIFF.',
    code: 'format',
  },
  {
    what: 'a GIF',
    name: 'a.gif',
    bytes: Buffer.from('GIF89a......'),
    says: 'a.gif is a GIF image, which is not read. Scans are read as PNG, JPEG, WebP or TIFF.',
    code: 'unsupported',
  },
  {
    what: 'a PDF',
    name: 'a.tif',
    bytes: Buffer.from('%PDF-1.7\n'),
    says: /is a PDF document, which is not read/,
    code: 'unsupported',
  },
  {
    what: 'a JPEG 2000',
    name: 'a.jp2',
    bytes: Buffer.from('\0\0\0\x0cjP  \r\n', 'latin1'),
    says: /is a JPEG 2000 image/,
    code: 'unsupported',
  },
  {
    what: 'two bytes of a TIFF',
    name: 'a.tif',
    bytes: Buffer.from('II'),
    says: 'a.tif is not a picture: it begins with "II". Scans are read as PNG, JPEG, WebP or TIFF.',
    code: 'format',
  },
  {
    what: 'a TIFF cut in its pixels',
    name: 'a.tif',
    // Our own writer puts the pixels first, so the directory is cut off with them.
    bytes: tiff.subarray(0, tiff.length >> 1),
    says: /^the file is cut short: it ends at byte \d+, but the TIFF directory at byte \d+ reaches to byte \d+\. Copy it again from its source\.$/,
    code: 'unreadable',
  },
  {
    what: 'a TIFF whose last strip is cut',
    name: 'a.tif',
    bytes: withDirectoryFirst(),
    says: /^the file is cut short: it ends at byte \d+, but strip 9 of 9 reaches to byte \d+\. Copy it again from its source\.$/,
    code: 'unreadable',
  },
  {
    what: 'a JPEG cut in its pixels',
    name: 'a.jpg',
    bytes: jpeg.subarray(0, jpeg.length - 100),
    says: `the file is cut short: it ends at byte ${jpeg.length - 100} before the end-of-image marker of the JPEG. ${copyAgain}`,
    code: 'unreadable',
  },
  {
    what: 'a PNG cut in its pixels',
    name: 'a.png',
    bytes: png.subarray(0, png.length - 100),
    says: new RegExp(
      `^the file is cut short: it ends at byte ${png.length - 100}, but the PNG chunk IDAT at byte \\d+ reaches to byte ${png.length - 12}\\. Copy`,
    ),
    code: 'unreadable',
  },
  {
    what: 'a PNG without its end',
    name: 'a.png',
    bytes: png.subarray(0, png.length - 12),
    says: `the file is cut short: it ends at byte ${png.length - 12}, but the PNG chunk at byte ${png.length - 12}, before the closing IEND, reaches to byte ${png.length}. ${copyAgain}`,
    code: 'unreadable',
  },
  {
    what: 'a WebP cut short',
    name: 'a.webp',
    bytes: webp.subarray(0, webp.length - 30),
    says: `the file is cut short: it ends at byte ${webp.length - 30}, but the WebP (RIFF) container reaches to byte ${webp.length}. ${copyAgain}`,
    code: 'unreadable',
  },
  {
    what: 'a PNG of 0 x 0',
    name: 'a.png',
    bytes: pngOf(0, 0),
    says: 'the file says it is 0 x 0 pixels: there is no picture in it. Save it again from the program that made it.',
    code: 'unreadable',
  },
  {
    what: 'a TIFF of 0 x 0',
    name: 'a.tif',
    bytes: tiffWith([
      [256, 4, [0]],
      [257, 4, [0]],
    ]),
    says: /^the file says it is 0 x 0 pixels/,
    code: 'unreadable',
  },
  {
    what: 'a JPEG of 0 x 0',
    name: 'a.jpg',
    bytes: jpegOf(0, 0),
    says: /^the file says it is 0 x 0 pixels/,
    code: 'unreadable',
  },
  {
    what: 'a CMYK JPEG',
    name: 'a.jpg',
    bytes: await colour().toColourspace('cmyk').jpeg().toBuffer(),
    says: 'the JPEG is in CMYK (four printing inks), which has no scan intensities. Save the original again in RGB or grey.',
    code: 'unsupported',
  },
  {
    what: 'a CMYK TIFF',
    name: 'a.tif',
    bytes: writeTiff({ ...plainTiff, samples: 4, data: laminated(4, 8), photometric: 5 }),
    says: 'the TIFF holds CMYK (printing inks); grey, RGB and palette colours are read. Save the original again in RGB or grey.',
    code: 'unsupported',
  },
  {
    what: 'a PNG of absurd dimensions',
    name: 'a.png',
    bytes: pngOf(2_000_000_000, 2_000_000_000),
    says: 'the file says it is 2000000000 x 2000000000 pixels; at most 400000 pixels a side can be read. If the scan is smaller than that, the file is damaged.',
    code: 'too-large',
  },
  {
    what: 'a PNG too large to be decoded whole',
    name: 'a.png',
    bytes: pngOf(20_000, 20_000),
    says: 'the scan has 20000 x 20000 pixels, 400 million; at most 300 million can be read from this format. Turn it into a tiled, pyramidal TIFF with "npx winterclay prepare SCAN --out FILE" and open that.',
    code: 'too-large',
  },
  {
    what: 'a TIFF of absurd dimensions',
    name: 'a.tif',
    bytes: tiffWith([
      [256, 4, [4_000_000_000]],
      [257, 4, [4_000_000_000]],
    ]),
    says: /^the file says it is 4000000000 x 4000000000 pixels; at most 400000/,
    code: 'too-large',
  },
  {
    what: 'a TIFF of too many pixels',
    name: 'a.tif',
    bytes: tiffWith([
      [256, 4, [390_000]],
      [257, 4, [390_000]],
    ]),
    says: 'the scan has 390000 x 390000 pixels, 152100 million; at most 4000 million can be read from this format. Cut the scan into sections, or scan at a lower resolution.',
    code: 'too-large',
  },
  {
    what: 'a TIFF larger than its strips can hold',
    name: 'a.tif',
    bytes: tiffWith([[256, 4, [60_000]]]),
    says: /^the file is damaged: strip 1 of 9 holds 610 bytes, too few for the 600000 bytes of its pixels\. Copy it again/,
    code: 'unreadable',
  },
  {
    what: 'a TIFF with fewer strips than rows ask for',
    name: 'a.tif',
    bytes: tiffWith([[257, 4, [60_000]]]),
    says: /^the file is damaged: TIFF StripOffsets lists 9 of the 6000 parts that the image size asks for\./,
    code: 'unreadable',
  },
  {
    what: 'a JPEG larger than its data can hold',
    name: 'a.jpg',
    bytes: jpegOf(16_000, 16_000),
    says: /^the file is damaged: JPEG holds \d+ bytes of image data, too few for the 16000 x 16000 pixels it states\./,
    code: 'unreadable',
  },
  {
    what: 'a JPEG of too many pixels',
    name: 'a.jpg',
    bytes: jpegOf(65_535, 65_535),
    says: /^the scan has 65535 x 65535 pixels, 4295 million; at most 300/,
    code: 'too-large',
  },
  {
    what: 'a PNG larger than its data can hold',
    name: 'a.png',
    bytes: pngOf(16_000, 16_000),
    says: /^the file is damaged: PNG image data is \d+ bytes long, too short for 16000 x 16000 pixels\./,
    code: 'unreadable',
  },
  {
    what: 'a TIFF of floating-point numbers',
    name: 'a.tif',
    bytes: tiffWith([[339, 3, [3]]]),
    says: 'the TIFF holds floating-point numbers; unsigned 8- or 16-bit samples are read. Convert it to 16-bit grey first.',
    code: 'unsupported',
  },
  {
    what: 'a TIFF of 32 bits',
    name: 'a.tif',
    bytes: tiffWith([[258, 3, [32]]]),
    says: 'the TIFF has 32 bits a sample; 1, 2, 4, 8 and 16 are read. Convert it to 16 bits first.',
    code: 'unsupported',
  },
  {
    what: 'a TIFF packed by Zstandard',
    name: 'a.tif',
    bytes: tiffWith([[259, 3, [50000]]]),
    says: 'the TIFF is compressed by Zstandard, which is not read. Save it again with LZW, Deflate or no compression.',
    code: 'unsupported',
  },
  {
    what: 'a PNG with garbled colours',
    name: 'a.png',
    bytes: withFlippedPalette(),
    says: 'the file is damaged: PNG chunk PLTE does not match its checksum. Copy it again from its source.',
    code: 'unreadable',
  },
  {
    what: 'a WebP animation',
    name: 'a.webp',
    bytes: await animation(),
    says: 'the WebP is an animation; a scan is a single picture. Save one frame as PNG or TIFF.',
    code: 'unsupported',
  },
]

/** A TIFF with its pixels behind the directory, the last five of them missing. */
function withDirectoryFirst(): Buffer {
  const rows = Array.from({ length: 9 }, (_, strip) => strip * 10)
  const start = writeTiff({ ...plainTiff, fields: [[273, 4, rows]] }).length
  const head = writeTiff({ ...plainTiff, fields: [[273, 4, rows.map((row) => start + row * width)]] })
  return Buffer.concat([head, laminated(1, 8) as Uint8Array]).subarray(0, start + width * height - 5)
}

function withFlippedPalette(): Buffer {
  const bytes = writePng({
    width,
    height,
    depth: 8,
    colour: 3,
    data: new Uint8Array(width * height),
    palette: Uint8Array.of(1, 2, 3),
  })
  bytes[bytes.indexOf('PLTE') + 4] ^= 1
  return bytes
}

function animation(): Promise<Buffer> {
  const frames = Buffer.concat([Buffer.alloc(48, 10), Buffer.alloc(48, 200)])
  return sharp(frames, { raw: { width: 4, height: 8, channels: 3, pageHeight: 4 } })
    .webp()
    .toBuffer()
}

let folder = ''
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'winterclay-bad-'))
})
afterAll(() => rmSync(folder, { recursive: true }))

describe('a file that is no good scan is refused in words, the same in the page and headless', () => {
  test.each(bad)('$what', async ({ name, bytes, says, code }) => {
    const path = join(folder, name)
    writeFileSync(path, bytes)
    const refusals = await Promise.all([
      refusal(() => openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), name)),
      refusal(() => openSharpScan(path)),
    ])
    for (const fault of refusals) {
      expect(fault.message).toMatch(says)
      expect(fault.code).toBe(code)
    }
    if (typeof says === 'string') expect(refusals.map(({ message }) => message)).toEqual([says, says])
  })
})

async function refusal(open: () => Promise<unknown>): Promise<Fault> {
  const outcome = await open().then(
    () => 'it was opened',
    (error: unknown) => error,
  )
  expect(outcome).toBeInstanceOf(Fault)
  return outcome as Fault
}

describe('damage that shows only when pixels are unpacked', () => {
  const open = (bytes: Uint8Array) => openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), 'a.tif')
  const read = async (bytes: Uint8Array) => (await open(bytes)).readRegion({ x: 0, y: 0, width, height })

  test.each([
    [
      'lzw',
      /^the file is damaged: LZW data (unpacks to \d+ bytes where 610 are needed|names code \d+ before it exists)\. Copy/,
    ],
    ['deflate', /^the file is damaged: Deflate data breaks off or is garbled after \d+ of 610 bytes\. Copy/],
    ['packbits', /^the file is damaged: PackBits data unpacks to \d+ bytes where 610 are needed\. Copy/],
  ] as const)('in %s', async (compression, says) => {
    const bytes = writeTiff({ ...plainTiff, compression })
    // Most of the first strip, which begins at byte 8.
    bytes.fill(0x80, 8, 220)
    await expect(read(bytes)).rejects.toThrow(says)
  })

  test('in a PNG', async () => {
    const bytes = Buffer.from(png)
    bytes[png.indexOf('IDAT') + 60] ^= 0xff
    await expect(open(bytes)).rejects.toThrow(/^the file is damaged: PNG image data /)
  })

  test('a good block of a damaged TIFF can still be read', async () => {
    const bytes = writeTiff({ ...plainTiff, compression: 'deflate' })
    bytes.fill(0x80, 60, 120)
    const samples = await (await open(bytes)).readRegion({ x: 0, y: 80, width, height: 3 })
    expect(samples.data).toEqual(laminated(1, 8).slice(80 * width))
  })
})
