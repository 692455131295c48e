import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { openSharpScan } from '../../../src/headless/sharpScan.ts'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import { sharpPixels } from '../../fixtures/sharpPixels.ts'

/** Line-scan photographs and radiographs of real lake cores: Roberts et al. 2022, Frontiers in Earth Science 10: 813396. */
const folder = join(process.env.WINTERCLAY_REFERENCE ?? '../shared/reference', 'scans')
const present = existsSync(folder)
const scans = present ? readdirSync(folder).filter((name) => name.endsWith('.tif')) : []

describe.skipIf(!present)(`scans of real cores ${present ? '' : ' (skipped: no reference data)'}`, () => {
  test.each(scans)('%s gives the samples that sharp reads, in both faces', async (name) => {
    const path = join(folder, name)
    const bytes = readFileSync(path)
    const oracle = await sharpPixels(bytes)
    const page = await openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), name)
    const headless = await openSharpScan(path)
    expect(headless.info).toEqual(page.info)
    const { width, height, channels, bits } = page.info
    expect([width, height, channels, bits]).toEqual([
      oracle.width,
      oracle.height,
      oracle.channels,
      oracle.data instanceof Uint16Array ? 16 : 8,
    ])
    for (const scan of [page, headless]) {
      const { data } = await scan.readRegion({ x: 0, y: 0, width, height })
      const same = Buffer.from(data.buffer, data.byteOffset, data.byteLength).equals(
        Buffer.from(oracle.data.buffer, oracle.data.byteOffset, oracle.data.byteLength),
      )
      expect(same).toBe(true)
    }
    headless.close()
  })

  // What the files state; two of them nothing, two the 72 per inch of programs that do not know.
  test.each([
    ['LP081H_optical.tif', 1599, null],
    ['LP081H_radiograph.tif', 3901, 72 / 25.4],
    ['LP164B_optical.tif', 1160, 72 / 25.4],
    ['LP164B_radiograph.tif', 8000, null],
  ])('%s is %i pixels long and states its resolution', async (name, length, perMm) => {
    const { info } = await openSharpScan(join(folder, name))
    expect(info.width).toBe(length)
    if (perMm === null) expect(info.resolution).toBeNull()
    else {
      expect(info.resolution?.xPerMm).toBeCloseTo(perMm, 9)
      expect(info.notes).toContain(
        'the stated resolution, 72 per inch, is what many programs write when they know none: check it on a ruler',
      )
    }
  })
})
