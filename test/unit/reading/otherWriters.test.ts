import { createHash } from 'node:crypto'
import { readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { openSharpScan } from '../../../src/headless/sharpScan.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import type { Scan } from '../../../worker/reading/scanFile.ts'

/** Files written by Pillow and tifffile, and what they held: see generate.py beside them. */
const folder = fileURLToPath(new URL('../../fixtures/scans/', import.meta.url))

interface Expected {
  shape: [height: number, width: number, channels: number]
  bits: number
  sha256: string
}

const expected = Object.entries(JSON.parse(readFileSync(`${folder}expected.json`, 'utf8')) as Record<string, Expected>)

const inPage = (name: string) =>
  openScanWith(sharpDecoders, new Blob([new Uint8Array(readFileSync(folder + name))]), name)

async function wholeHash(scan: Scan): Promise<string> {
  const { width, height } = scan.info
  const { data } = await scan.readRegion({ x: 0, y: 0, width, height })
  return createHash('sha256').update(data).digest('hex')
}

describe('files of other writers give the samples that were written', () => {
  test('every file has its expected samples noted', () => {
    const files = readdirSync(folder).filter((name) => /\.(tif|png|jpg)$/.test(name))
    expect(files.sort()).toEqual(expected.map(([name]) => name).sort())
  })

  test.each(expected)('%s', async (name, { shape, bits, sha256 }) => {
    for (const scan of [await inPage(name), await openSharpScan(folder + name)]) {
      const { info } = scan
      expect({ shape: [info.height, info.width, info.channels], bits: info.bits }).toEqual({ shape, bits })
      expect(await wholeHash(scan)).toBe(sha256)
      scan.close()
    }
  })
})

describe('what other writers say about their files', () => {
  test.each([
    ['pillow-grey-packbits.tif', 600 / 25.4, 'TIFF XResolution, per inch'],
    ['pillow-colour.jpg', 300 / 25.4, 'JFIF density, per inch'],
    ['tifffile-big-grey16-strips.tif', 20, 'TIFF XResolution, per centimetre'],
    ['tifffile-sub-directories.tif', 500 / 25.4, 'TIFF XResolution, per inch'],
  ])('%s states its resolution', async (name, perMm, source) => {
    const { resolution } = (await inPage(name)).info
    expect(resolution?.xPerMm).toBeCloseTo(perMm, 9)
    expect(resolution?.yPerMm).toBeCloseTo(perMm, 9)
    expect(resolution?.source).toBe(source)
  })

  test('sub-directories are levels, read exactly', async () => {
    const scan = await inPage('tifffile-sub-directories.tif')
    expect(scan.info.levels).toEqual([
      { width: 33, height: 44, shrink: 1 },
      { width: 17, height: 22, shrink: 2 },
      { width: 9, height: 11, shrink: 4 },
    ])
    const whole = await scan.readRegion({ x: 0, y: 0, width: 33, height: 44 })
    const half = await scan.readRegion({ x: 0, y: 0, width: 17, height: 22 }, 1)
    // The generator took every second pixel.
    expect(half.get(3, 5, 1)).toBe(whole.get(6, 10, 1))
  })

  test('white as 0, and further pictures, are noted', async () => {
    expect((await inPage('tifffile-little-white-is-zero.tif')).info.notes).toEqual([
      'stored with white as 0 (WhiteIsZero); values are turned round so that high is light',
    ])
    expect((await inPage('tifffile-two-pictures.tif')).info.notes).toEqual([
      'the file holds 2 pictures; the first is read',
    ])
  })
})
