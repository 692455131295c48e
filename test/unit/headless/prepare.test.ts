import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { deflateSync } from 'node:zlib'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { prepareScan } from '../../../src/headless/prepare.ts'
import { fileSource, openFile, openSharpScan } from '../../../src/headless/sharpScan.ts'
import { describeScan } from '../../../worker/reading/describe.ts'
import { laminated, scanFiles } from '../../fixtures/scanFiles.ts'
import { chunk, writePng } from '../../fixtures/writePng.ts'
import { writeTiff } from '../../fixtures/writeTiff.ts'

let folder = ''
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'winterclay-prepare-'))
})
afterAll(() => rmSync(folder, { recursive: true }))

const save = (name: string, bytes: Uint8Array): string => {
  writeFileSync(join(folder, name), bytes)
  return join(folder, name)
}

const png = writePng({ width: 4, height: 4, depth: 8, colour: 0, data: laminated(1, 8, 4, 4) })

const names = [
  '1x8 plain.png',
  '3x8 plain.png',
  '4x8 plain.png',
  '1x16 plain.png',
  '2x16 plain.png',
  '3x16 plain.png',
  'palette.png',
  'wide gamut.png',
  '1 baseline.jpg',
  'turned.jpg',
  'wide gamut.jpg',
  'lossy.webp',
  '1x16 lzw big-endian strips.tif',
  '3x16 deflate little-endian strips.tif',
  '1x16 white is zero.tif',
]
const files = (await scanFiles()).filter(({ name }) => names.includes(name))

describe('a prepared scan', () => {
  test('is tested for every kind', () => {
    expect(files.map(({ name }) => name).sort()).toEqual([...names].sort())
  })

  test.each(files)('has the samples of $name', async ({ name, bytes }) => {
    const path = save(name, bytes)
    const out = join(folder, `${name}.prepared.tif`)
    const written = await prepareScan(path, out)
    const [before, after] = [await openSharpScan(path), await openSharpScan(out)]
    const { width, height, channels, bits } = before.info
    const kept = channels >= 3 ? 3 : 1
    expect(written).toEqual({ width, height, channels: kept, bits })
    expect(after.info).toMatchObject({ width, height, channels: kept, bits, format: 'tiff' })
    const region = { x: 0, y: 0, width, height }
    const [was, is] = [(await before.readRegion(region)).data, (await after.readRegion(region)).data]
    expect(is).toEqual(was.filter((_, i) => i % channels < kept))
  })

  test('is tiled, with levels down to a screenful, and keeps the stated resolution', async () => {
    const data = laminated(1, 16, 3000, 40)
    const fields = [
      [282, 5, [2540, 1]],
      [283, 5, [1270, 1]],
      [296, 3, [2]],
    ] as [number, number, number[]][]
    const path = save(
      'long.tif',
      writeTiff({ width: 3000, height: 40, samples: 1, bits: 16, data, photometric: 1, fields }),
    )
    const out = join(folder, 'long prepared.tif')
    await prepareScan(path, out)
    const { info } = await openSharpScan(out)
    expect(info.levels.slice(0, 4).map(({ shrink }) => shrink)).toEqual([1, 2, 4, 8])
    expect(info.resolution?.xPerMm).toBeCloseTo(100, 6)
    expect(info.resolution?.yPerMm).toBeCloseTo(50, 6)
  })

  test('may come from a PNG that is too large to be held in memory', async () => {
    // 320 million blank pixels of one bit; the rows of such a picture take 40 MB unpacked and a hundredth of it packed.
    const [width, height] = [32_000, 10_000]
    const row = Buffer.alloc(1 + width / 8)
    const packed = deflateSync(Buffer.concat(Array.from({ length: height }, () => row)), { level: 1 })
    const header = Buffer.alloc(13)
    header.writeUInt32BE(width, 0)
    header.writeUInt32BE(height, 4)
    header.set([1, 0, 0, 0, 0], 8)
    const parts = [chunk('IHDR', header), chunk('IDAT', packed), chunk('IEND', Buffer.alloc(0))]
    const path = save('large.png', Buffer.concat([png.subarray(0, 8), ...parts]))
    await expect(openSharpScan(path)).rejects.toThrow(/320 million; at most 300 million .* "npx winterclay prepare/)
    const handle = await openFile(path)
    const description = await describeScan(fileSource(handle, (await handle.stat()).size), 'large.png', false)
    await handle.close()
    expect(description.info).toMatchObject({ width, height })
  })
})

describe('preparing is refused in words', () => {
  test('over the scan itself', async () => {
    const path = save('itself.png', png)
    await expect(prepareScan(path, path)).rejects.toThrow(`--out names the scan itself, ${path}; give another file`)
  })

  test('into a folder that is not there', async () => {
    const out = join(folder, 'none', 'a.tif')
    await expect(prepareScan(save('a.png', png), out)).rejects.toThrow(`cannot write ${out}: it does not exist`)
  })

  test('for a file that is damaged, and leaves nothing behind', async () => {
    const bytes = Buffer.from(writePng({ width: 60, height: 60, depth: 8, colour: 0, data: laminated(1, 8, 60, 60) }))
    bytes[bytes.indexOf('IDAT') + 20] ^= 0xff
    const out = join(folder, 'damaged.tif')
    await expect(prepareScan(save('damaged.png', bytes), out)).rejects.toThrow(
      /damaged\.png could not be written to .*damaged\.tif: /,
    )
    expect(readdirSync(folder).filter((name) => name.startsWith('damaged.tif'))).toEqual([])
  })

  test('for separate planes', async () => {
    const picture = {
      width: 4,
      height: 4,
      samples: 3,
      bits: 8,
      data: laminated(3, 8, 4, 4),
      photometric: 2,
      planar: true,
    } as const
    const path = save('planes.tif', writeTiff(picture))
    await expect(prepareScan(path, join(folder, 'planes prepared.tif'))).rejects.toThrow(
      'stores its channels in separate planes',
    )
  })
})
