import { deflateSync } from 'node:zlib'
import { describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { blobSource, memorySource } from '../../../worker/reading/bytes.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import type { ByteSource, StatedResolution } from '../../../worker/reading/scanFile.ts'
import { readTiffLayout } from '../../../worker/reading/tiff.ts'
import { inParts } from '../../../worker/reading/tiffImage.ts'
import { TiffPixels } from '../../../worker/reading/tiffPixels.ts'
import { seededRandom } from '../../../worker/random.ts'
import { laminated } from '../../fixtures/scanFiles.ts'
import { writeTiff } from '../../fixtures/writeTiff.ts'
import type { TiffToWrite } from '../../fixtures/writeTiff.ts'

const grey = (width: number, height: number): TiffToWrite => ({
  width,
  height,
  samples: 1,
  bits: 8,
  data: laminated(1, 8, width, height),
  photometric: 1,
})
const open = (bytes: Uint8Array) => openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), 'core.tif')

describe('the pictures of a TIFF', () => {
  test('reduced copies below the scan are its levels, largest first, whatever their order in the file', async () => {
    const scan = await open(writeTiff({ ...grey(101, 67), subIfds: [grey(25, 16), grey(50, 33)], big: true }))
    expect(scan.info.levels.map(({ shrink }) => shrink)).toEqual([1, 2, 4])
    expect((await scan.readRegion({ x: 0, y: 0, width: 25, height: 16 }, 2)).data).toEqual(laminated(1, 8, 25, 16))
  })

  test('reduced copies after the scan are its levels, rounded up or down', async () => {
    const scan = await open(writeTiff({ ...grey(101, 67), next: [grey(51, 34), grey(25, 16)] }))
    expect(scan.info.levels.map(({ width, height, shrink }) => [width, height, shrink])).toEqual([
      [101, 67, 1],
      [51, 34, 2],
      [25, 16, 4],
    ])
    expect(scan.info.notes).toEqual([])
  })

  test('a picture of another shape or kind is no level', async () => {
    const other: TiffToWrite = { ...grey(50, 33), bits: 16, data: laminated(1, 16, 50, 33) }
    const scan = await open(writeTiff({ ...grey(101, 67), next: [grey(40, 60), other] }))
    expect(scan.info.levels).toHaveLength(1)
  })

  test('a thumbnail before the scan is not taken for it', async () => {
    const scan = await open(
      writeTiff({ ...grey(50, 33), fields: [[254, 4, [1]]], next: [{ ...grey(101, 67), fields: [[254, 4, [0]]] }] }),
    )
    expect([scan.info.width, scan.info.height]).toEqual([101, 67])
    expect((await scan.readRegion({ x: 0, y: 0, width: 50, height: 33 }, 1)).data).toEqual(laminated(1, 8, 50, 33))
  })

  test('directories that run in a circle are looked at once', async () => {
    const bytes = writeTiff(grey(20, 10))
    const directory = bytes.readUInt32LE(4)
    bytes.writeUInt32LE(directory, directory + 2 + bytes.readUInt16LE(directory) * 12)
    const scan = await open(bytes)
    expect(scan.info.notes).toEqual(['the list of pictures in the file runs in a circle; each is looked at once'])
  })

  test('a broken reduced copy is left out and noted', async () => {
    const bytes = writeTiff({ ...grey(101, 67), next: [{ ...grey(50, 33), fields: [[259, 3, [50000]]] }] })
    const scan = await open(bytes)
    expect(scan.info.levels).toHaveLength(1)
    expect(scan.info.notes).toEqual([
      'a reduced copy in the file cannot be read and is not used: the TIFF is compressed by Zstandard, which is not read. Save it again with LZW, Deflate or no compression.',
    ])
  })

  test('the orientation is noted and the pixel grid of the file kept', async () => {
    const scan = await open(writeTiff({ ...grey(20, 10), fields: [[274, 3, [6]]] }))
    expect([scan.info.width, scan.info.height]).toEqual([20, 10])
    expect(scan.info.notes).toEqual([
      'the file asks to be shown turned clockwise by 90 degrees; its own pixel grid is used',
    ])
  })

  test.each([
    [
      'in inches',
      [
        [282, 5, [600, 1]],
        [283, 5, [300, 1]],
        [296, 3, [2]],
      ],
      { xPerMm: 600 / 25.4, yPerMm: 300 / 25.4, source: 'TIFF XResolution, per inch' },
    ],
    [
      'in centimetres',
      [
        [282, 5, [2001, 10]],
        [283, 5, [2001, 10]],
        [296, 3, [3]],
      ],
      { xPerMm: 20.01, yPerMm: 20.01, source: 'TIFF XResolution, per centimetre' },
    ],
    [
      'without a unit',
      [
        [282, 5, [600, 1]],
        [283, 5, [600, 1]],
        [296, 3, [1]],
      ],
      null,
    ],
    [
      'divided by zero',
      [
        [282, 5, [600, 0]],
        [283, 5, [600, 0]],
        [296, 3, [2]],
      ],
      null,
    ],
    [
      'of zero',
      [
        [282, 5, [0, 1]],
        [283, 5, [0, 1]],
        [296, 3, [2]],
      ],
      null,
    ],
    ['not at all', [], null],
  ] as [string, NonNullable<TiffToWrite['fields']>, StatedResolution | null][])(
    'a resolution stated %s',
    async (_, fields, resolution) => {
      const stated = (await open(writeTiff({ ...grey(20, 10), fields }))).info.resolution
      if (!resolution) expect(stated).toBeNull()
      else {
        expect(stated?.xPerMm).toBeCloseTo(resolution.xPerMm, 12)
        expect(stated?.yPerMm).toBeCloseTo(resolution.yPerMm, 12)
        expect(stated?.source).toBe(resolution.source)
      }
    },
  )
})

describe('tall strips', () => {
  const [width, height] = [37, 211]
  const data = laminated(3, 16, width, height)
  const picture: TiffToWrite = { width, height, samples: 3, bits: 16, data, photometric: 2 }

  test.each([
    ['lzw', true, undefined],
    ['lzw', false, 53],
    ['deflate', true, undefined],
    ['deflate', false, 53],
    ['packbits', false, undefined],
    ['packbits', false, 53],
    ['none', false, undefined],
    ['none', false, 60],
  ] as const)(
    '%s, unpacked as a stream of bands, give every region (predictor %s, rows per strip %s)',
    async (compression, predictor, rows) => {
      for (const planar of [false, true]) {
        const source = memorySource(
          writeTiff({
            ...picture,
            compression,
            predictor,
            planar,
            bigEndian: true,
            ...(rows ? { rowsPerStrip: rows } : {}),
          }),
        )
        const layout = await readTiffLayout(source)
        const image = inParts(layout.levels[0].image, { whole: 1000, band: 1300, part: 1300 })
        expect(image.blockHeight).toBeLessThan(20)
        expect(image.partsOfStrip > 1).toBe(compression !== 'none')
        const pixels = new TiffPixels(source, { ...layout, levels: [{ ...layout.levels[0], image }] }, sharpDecoders)
        const random = seededRandom(5)
        for (let turn = 0; turn < 12; turn++) {
          const x = random.below(width)
          const y = random.below(height)
          const region = { x, y, width: 1 + random.below(width - x), height: 1 + random.below(height - y) }
          const samples = await pixels.read(region, 0)
          expect(samples.data, `turn ${turn}, ${JSON.stringify(region)}`).toEqual(cut(region))
        }
      }
    },
  )

  function cut(region: { x: number; y: number; width: number; height: number }): Uint16Array {
    const rows = Array.from({ length: region.height }, (_, row) => {
      const start = ((region.y + row) * width + region.x) * 3
      return Array.from(data.subarray(start, start + region.width * 3))
    })
    return Uint16Array.from(rows.flat())
  }

  test('one strip of 17 MB is read without being held whole', async () => {
    const [wide, tall] = [4000, 4400]
    const row = Uint8Array.from({ length: wide }, (_, x) => (x * x) % 251)
    const pixels = Buffer.alloc(wide * tall)
    for (let y = 0; y < tall; y++) pixels.set(row, y * wide)
    for (let y = 0; y < tall; y++) pixels[y * wide] = y % 256
    const packed = deflateSync(pixels, { level: 1 })
    const head = writeTiff({ ...grey(wide, tall), jpegBlocks: [packed], compression: 'deflate' })
    const scan = await open(head)
    const column = await scan.readRegion({ x: 0, y: 0, width: 3, height: tall })
    for (let y = 0; y < tall; y += 97) {
      expect([column.get(y, 0, 0), column.get(y, 1, 0), column.get(y, 2, 0)]).toEqual([y % 256, 1, 4])
    }
    const late = await scan.readRegion({ x: 100, y: 4390, width: 2, height: 2 })
    expect(Array.from(late.data)).toEqual([row[100], row[101], row[100], row[101]])
  })
})

describe('reading from the file', () => {
  test('only the blocks of a region are read', async () => {
    const bytes = writeTiff({ ...grey(640, 640), tile: [64, 64] })
    const reads: [number, number][] = []
    const source: ByteSource = {
      size: bytes.length,
      read(offset, length) {
        reads.push([offset, length])
        return memorySource(bytes).read(offset, length)
      },
    }
    const pixels = new TiffPixels(source, await readTiffLayout(source), sharpDecoders)
    reads.length = 0
    await pixels.read({ x: 70, y: 70, width: 10, height: 10 }, 0)
    expect(reads).toEqual([[8 + 11 * 4096, 4096]])
    await pixels.read({ x: 64, y: 64, width: 64, height: 64 }, 0)
    expect(reads, 'a block that was decoded is kept').toHaveLength(1)
    await pixels.read({ x: 0, y: 0, width: 640, height: 64 }, 0)
    expect(reads.slice(1), 'neighbours in the file are read at once').toEqual([[8, 10 * 4096]])
  })

  test('requests at the same time share what they decode', async () => {
    const bytes = writeTiff({ ...grey(640, 640), tile: [64, 64], compression: 'deflate' })
    let reads = 0
    const source: ByteSource = {
      size: bytes.length,
      read(offset, length) {
        reads++
        return memorySource(bytes).read(offset, length)
      },
    }
    const pixels = new TiffPixels(source, await readTiffLayout(source), sharpDecoders)
    reads = 0
    const region = { x: 64, y: 64, width: 10, height: 10 }
    const answers = await Promise.all([pixels.read(region, 0), pixels.read(region, 0), pixels.read(region, 0)])
    expect(reads).toBe(1)
    expect(answers[1].data).toEqual(answers[0].data)
  })

  test('a file that is gone says so', async () => {
    const gone = { size: 100, slice: () => ({ arrayBuffer: () => Promise.reject(new Error('NotReadableError')) }) }
    await expect(blobSource(gone as unknown as Blob).read(0, 10)).rejects.toThrow(
      'the file can no longer be read: it was changed, moved or deleted since it was chosen, or its disk is gone. Open it again.',
    )
  })
})
