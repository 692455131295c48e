import { describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { samplesOf } from '../../../worker/core/scan.ts'
import { LevelledScan, MemoryPixels } from '../../../worker/reading/levelledScan.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import { furtherLevels } from '../../../worker/reading/overviews.ts'
import type { ScanInfo } from '../../../worker/reading/scanFile.ts'
import { laminated } from '../../fixtures/scanFiles.ts'
import { writePng } from '../../fixtures/writePng.ts'
import { writeTiff } from '../../fixtures/writeTiff.ts'

const info = (width: number, height: number, channels: 1 | 3, bits: 8 | 16): Omit<ScanInfo, 'levels'> => ({
  width, height, channels, bits, sha256: '', name: 'core.png', bytes: 0, format: 'png', resolution: null, notes: [],
}) // prettier-ignore

function inMemory(
  width: number,
  height: number,
  channels: 1 | 3,
  bits: 8 | 16,
  data = laminated(channels, bits, width, height),
) {
  return new LevelledScan(
    new MemoryPixels(samplesOf(data, width, height, channels)),
    info(width, height, channels, bits),
  )
}

describe('levels for the screen', () => {
  test.each([[8], [16]] as const)(
    'a pixel is the mean of the square it spans, cut squares too (%s bits)',
    async (bits) => {
      const [width, height] = [2051, 9]
      const data = laminated(3, bits, width, height)
      const scan = inMemory(width, height, 3, bits, data)
      expect(scan.info.levels).toEqual([
        { width: 2051, height: 9, shrink: 1 },
        { width: 1026, height: 5, shrink: 2 },
        { width: 513, height: 3, shrink: 4 },
      ])
      const half = await scan.readRegion({ x: 0, y: 0, width: 1026, height: 5 }, 1)
      const at = (x: number, y: number, c: number) => data[(y * width + x) * 3 + c]
      for (const x of [0, 1, 512, 1024]) {
        const mean = (at(2 * x, 2, 1) + at(2 * x + 1, 2, 1) + at(2 * x, 3, 1) + at(2 * x + 1, 3, 1)) / 4
        expect(half.get(1, x, 1)).toBe(Math.floor(mean + 0.5))
      }
      expect(half.get(2, 1025, 0)).toBe(Math.floor((at(2050, 4, 0) + at(2050, 5, 0)) / 2 + 0.5))
      expect(half.get(4, 3, 2)).toBe(Math.floor((at(6, 8, 2) + at(7, 8, 2)) / 2 + 0.5))
      expect(half.get(4, 1025, 2)).toBe(at(2050, 8, 2))
    },
  )

  test('every level is made of the one before', async () => {
    const scan = inMemory(3000, 40, 1, 8)
    const half = await scan.readRegion({ x: 0, y: 0, width: 1500, height: 20 }, 1)
    const quarter = await scan.readRegion({ x: 0, y: 0, width: 750, height: 10 }, 2)
    const mean = (half.get(4, 10, 0) + half.get(4, 11, 0) + half.get(5, 10, 0) + half.get(5, 11, 0)) / 4
    expect(quarter.get(2, 5, 0)).toBe(Math.floor(mean + 0.5))
  })

  test('a file and memory give the same levels', async () => {
    const [width, height] = [60, 2200]
    const data = laminated(3, 16, width, height)
    const png = writePng({ width, height, depth: 16, colour: 2, data })
    const tiff = writeTiff({
      width,
      height,
      samples: 3,
      bits: 16,
      data,
      photometric: 2,
      compression: 'deflate',
      rowsPerStrip: 7,
    })
    const [fromPng, fromTiff] = await Promise.all([
      openScanWith(sharpDecoders, new Blob([new Uint8Array(png)]), 'a.png'),
      openScanWith(sharpDecoders, new Blob([new Uint8Array(tiff)]), 'a.tif'),
    ])
    expect(fromTiff.info.levels).toEqual(fromPng.info.levels)
    const region = { x: 0, y: 0, width: 15, height: 550 }
    expect((await fromTiff.readRegion(region, 2)).data).toEqual((await fromPng.readRegion(region, 2)).data)
  })

  test('building them ahead reports progress and can be stopped', async () => {
    const scan = inMemory(1200, 900, 1, 8)
    const stop = new AbortController()
    stop.abort(new Error('cancelled'))
    await expect(scan.buildOverview(undefined, stop.signal)).rejects.toThrow('cancelled')
    const done: number[] = []
    await scan.buildOverview((progress) => {
      expect(progress).toMatchObject({ stage: 'overview', total: 900 })
      done.push(progress.done)
    })
    expect(done.at(-1)).toBe(900)
    expect((await scan.readRegion({ x: 0, y: 0, width: 600, height: 450 }, 1)).shape).toEqual([450, 600, 1])
  })

  test('a large file is passed once, straight to a level that fits into memory', () => {
    const levels = furtherLevels([{ width: 150_000, height: 4000, shrink: 1 }], { channels: 3, bits: 8 }, false)
    expect(levels.map(({ shrink }) => shrink)).toEqual([4, 8, 16, 32, 64, 128, 256])
    const short = furtherLevels([{ width: 2000, height: 10, shrink: 1 }], { channels: 3, bits: 8 }, false)
    expect(short).toEqual([{ width: 1000, height: 5, shrink: 2 }])
    expect(furtherLevels([{ width: 1000, height: 10, shrink: 1 }], { channels: 1, bits: 8 }, true)).toEqual([])
  })
})

describe('a region', () => {
  const scan = inMemory(1500, 100, 1, 8)

  test.each([
    [{ x: -1, y: 0, width: 5, height: 5 }, 0],
    [{ x: 0, y: 0, width: 1501, height: 5 }, 0],
    [{ x: 1400, y: 96, width: 5, height: 5 }, 0],
    [{ x: 0, y: 0, width: 0, height: 5 }, 0],
    [{ x: 0.5, y: 0, width: 5, height: 5 }, 0],
    [{ x: NaN, y: 0, width: 5, height: 5 }, 0],
    [{ x: 0, y: 0, width: 751, height: 5 }, 1],
  ])('must lie inside its level: %o of level %i does not', async (region, level) => {
    const size = level === 0 ? '1500 x 100' : '750 x 50'
    const received = `${region.width} x ${region.height} at ${region.x}, ${region.y}`
    await expect(scan.readRegion(region, level)).rejects.toThrow(
      `region must lie inside level ${level} (${size} pixels), in whole pixels; it is ${received}`,
    )
  })

  test.each([-1, 2, 0.5, NaN])('must be of a level that exists: %s is none', async (level) => {
    await expect(scan.readRegion({ x: 0, y: 0, width: 1, height: 1 }, level)).rejects.toThrow(
      `level must be a whole number from 0 to 1; it is ${level}`,
    )
  })

  test('is a copy: writing into it does not change the scan', async () => {
    const region = { x: 3, y: 4, width: 2, height: 2 }
    const first = await scan.readRegion(region)
    const before = Array.from(first.data)
    first.data.fill(7)
    expect(Array.from((await scan.readRegion(region)).data)).toEqual(before)
  })
})

describe('opening', () => {
  const png = new Blob([
    new Uint8Array(writePng({ width: 5, height: 4, depth: 8, colour: 0, data: laminated(1, 8, 5, 4) })),
  ])

  test('goes by the content and notes a name that disagrees', async () => {
    const scan = await openScanWith(sharpDecoders, png, 'core.TIF')
    expect(scan.info.format).toBe('png')
    expect(scan.info.notes).toEqual(['named .tif, but it is a PNG by its content and read as such'])
    expect((await openScanWith(sharpDecoders, png, 'core.PNG')).info.notes).toEqual([])
    expect((await openScanWith(sharpDecoders, png, 'core')).info.notes).toEqual([])
  })

  test('can be cancelled', async () => {
    const stop = new AbortController()
    stop.abort(new Error('cancelled'))
    await expect(openScanWith(sharpDecoders, png, 'core.png', undefined, stop.signal)).rejects.toThrow('cancelled')
  })

  test('states facts that follow from the file alone', async () => {
    expect((await openScanWith(sharpDecoders, png, 'core.png')).info).toMatchObject({
      name: 'core.png', bytes: png.size, width: 5, height: 4, channels: 1, bits: 8, resolution: null,
    }) // prettier-ignore
  })
})
