import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import sharp from 'sharp'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { openSharpScan } from '../../../src/headless/sharpScan.ts'
import { seededRandom } from '../../../worker/random.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import type { Scan } from '../../../worker/reading/scanFile.ts'
import type { Region } from '../../../worker/units.ts'
import { laminated, scanFiles } from '../../fixtures/scanFiles.ts'

let folder = ''
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'winterclay-sharp-'))
})
afterAll(() => rmSync(folder, { recursive: true }))

function save(name: string, bytes: Uint8Array): string {
  const path = join(folder, name)
  writeFileSync(path, bytes)
  return path
}

const files = await scanFiles()

describe('headless, a scan is what it is in the page', () => {
  test.each(files)('$name', async ({ name, bytes }) => {
    const headless = await openSharpScan(save(name, bytes))
    const page = await openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), name)
    expect(headless.info).toEqual(page.info)
    const random = seededRandom(bytes.length)
    for (const [level, { width, height }] of page.info.levels.entries()) {
      const x = random.below(width)
      const y = random.below(height)
      const region = { x, y, width: 1 + random.below(width - x), height: 1 + random.below(height - y) }
      const where = `level ${level}, region ${JSON.stringify(region)}`
      expect(same(await samplesIn(headless, region, level), await samplesIn(page, region, level)), where).toBe(true)
    }
    headless.close()
  })
})

async function samplesIn(scan: Scan, region: Region, level: number): Promise<Uint8Array | Uint16Array> {
  const samples = await scan.readRegion(region, level)
  expect(samples.shape).toEqual([region.height, region.width, scan.info.channels])
  return samples.data
}

/** Millions of samples are compared as bytes; an assertion on arrays takes seconds. */
function same(a: Uint8Array | Uint16Array, b: Uint8Array | Uint16Array): boolean {
  const bytes = (data: Uint8Array | Uint16Array) => Buffer.from(data.buffer, data.byteOffset, data.byteLength)
  return bytes(a).equals(bytes(b))
}

describe('windowed reading headless', () => {
  const width = 40
  const height = 3000
  const data = laminated(3, 8, width, height) as Uint8Array
  const picture = () => sharp(data, { raw: { width, height, channels: 3 } })

  test.each(['down', 'up', 'here and there'])('bands asked for going %s are the samples of the file', async (order) => {
    const path = save(`bands ${order}.png`, await picture().png().toBuffer())
    const scan = await openSharpScan(path)
    const starts = Array.from({ length: 10 }, (_, i) => i * 300)
    if (order === 'up') starts.reverse()
    if (order === 'here and there') starts.sort((a, b) => ((a * 7) % 1100) - ((b * 7) % 1100))
    for (const [turn, y] of starts.entries()) {
      // The bands of a bent transect move sideways as well.
      const x = order === 'here and there' ? turn * 3 : 5
      const samples = await scan.readRegion({ x, y, width: 10, height: 300 })
      for (const [row, column] of [
        [0, 0],
        [299, 9],
        [150, 4],
      ]) {
        for (let channel = 0; channel < 3; channel++) {
          expect(samples.get(row, column, channel)).toBe(data[((y + row) * width + x + column) * 3 + channel])
        }
      }
    }
    scan.close()
  })

  test('a file that is replaced between two runs is read anew', async () => {
    const path = save('replaced.tif', await picture().tiff({ compression: 'lzw' }).toBuffer())
    const region = { x: 0, y: 0, width, height }
    const before = await samplesIn(await openSharpScan(path), region, 0)
    save('replaced.tif', await picture().negate().tiff({ compression: 'lzw' }).toBuffer())
    const after = await samplesIn(await openSharpScan(path), region, 0)
    expect(after).toEqual(before.map((value) => 255 - value))
  })

  test('a path that is no file is refused in words', async () => {
    await expect(openSharpScan(join(folder, 'none.tif'))).rejects.toThrow(/none\.tif does not exist\. Check the path/)
    await expect(openSharpScan(folder)).rejects.toThrow(/is not a file\. Name the scan itself\./)
  })

  test('a closed scan answers no more', async () => {
    const scan = await openSharpScan(save('closed.png', await picture().png().toBuffer()))
    scan.close()
    await expect(scan.readRegion({ x: 0, y: 0, width: 1, height: 1 })).rejects.toThrow(
      'closed.png was closed; open its file again',
    )
  })
})
