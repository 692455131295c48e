import { describe, expect, test } from 'vitest'
import { openScanWith } from '../../../worker/reading/openScan.ts'
import type { Scan } from '../../../worker/reading/scanFile.ts'
import { sharpDecoders } from '../../../src/headless/sharpDecoders.ts'
import { scanFiles } from '../../fixtures/scanFiles.ts'
import { sharpPixels } from '../../fixtures/sharpPixels.ts'

async function wholeScan(scan: Scan): Promise<Uint8Array | Uint16Array> {
  const { width, height } = scan.info
  return (await scan.readRegion({ x: 0, y: 0, width, height })).data
}

const files = await scanFiles()

describe('every kind of scan gives the samples that sharp reads from it', () => {
  test.each(files)('$name', async ({ name, bytes, known, beyondSharp }) => {
    const scan = await openScanWith(sharpDecoders, new Blob([new Uint8Array(bytes)]), name)
    const samples = await wholeScan(scan)
    if (known) expect(firstDifference(samples, known)).toBeNull()
    if (beyondSharp) return
    const oracle = await sharpPixels(bytes)
    const { width, height, channels, bits } = scan.info
    expect([width, height, channels]).toEqual([oracle.width, oracle.height, oracle.channels])
    expect(bits).toBe(oracle.data instanceof Uint16Array ? 16 : 8)
    expect(firstDifference(samples, oracle.data)).toBeNull()
  })
})

function firstDifference(a: ArrayLike<number>, b: ArrayLike<number>): string | null {
  if (a.length !== b.length) return `${a.length} and ${b.length} samples`
  for (let i = 0; i < a.length; i++) if (a[i] !== b[i]) return `sample ${i}: ${a[i]} and ${b[i]}`
  return null
}
