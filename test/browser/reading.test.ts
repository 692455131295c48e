import { createHash } from 'node:crypto'
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { openSharpScan } from '../../src/headless/sharpScan.ts'
import type * as Reading from '../../worker/reading/openScan.ts'
import type { Scan, ScanInfo } from '../../worker/reading/scanFile.ts'
import { scanFiles } from '../fixtures/scanFiles.ts'
import { sharpPixels } from '../fixtures/sharpPixels.ts'
import { openSourcePage } from './readingPage.ts'
import type { Loading, SourcePage } from './readingPage.ts'

interface Seen {
  name: string
  info: ScanInfo
  /** SHA-256 of the samples of each whole level, as little-endian bytes. */
  levels: string[]
}

let folder = ''
let source: SourcePage
const others = fileURLToPath(new URL('../fixtures/scans/', import.meta.url))
const files = [
  ...(await scanFiles()),
  ...readdirSync(others)
    .filter((name) => /\.(tif|png|jpg)$/.test(name))
    .map((name) => ({
      name,
      bytes: readFileSync(others + name),
      known: null,
      beyondSharp: /planes/.test(name),
    })),
]

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'winterclay-reading-'))
  for (const { name, bytes } of files) writeFileSync(join(folder, name), bytes)
  source = await openSourcePage()
})
afterAll(async () => {
  await source.close()
  rmSync(folder, { recursive: true })
})

describe('reading in Chromium', () => {
  test('gives in every format, at every level, the samples and facts of the headless reader', async () => {
    const seen = await readInPage(files.map(({ name }) => name))
    expect(seen.map(({ name }) => name)).toEqual(files.map(({ name }) => name))
    for (const { name, info, levels } of seen) {
      const headless = await openSharpScan(join(folder, name))
      expect(info, name).toEqual(headless.info)
      expect(levels, name).toEqual(await levelHashes(headless))
      headless.close()
    }
  }, 120_000)

  test('gives the samples that sharp decodes, without detour over our own code', async () => {
    const plain = files.filter(({ beyondSharp }) => !beyondSharp).filter((_, i) => i % 5 === 0)
    const seen = await readInPage(plain.map(({ name }) => name))
    for (const [i, { bytes, name }] of plain.entries()) {
      const { data } = await sharpPixels(bytes)
      expect(seen[i].levels[0], name).toBe(hash(data))
    }
  }, 60_000)
})

async function readInPage(names: string[]): Promise<Seen[]> {
  await source.pick(names.map((name) => join(folder, name)))
  return source.page.evaluate(async (address) => {
    const { openScan } = await (globalThis as unknown as Loading<typeof Reading>).load(address)
    const picked = Array.from(document.querySelector<HTMLInputElement>('#files')!.files!)
    const seen: Seen[] = []
    for (const file of picked) {
      const scan = await openScan(file, file.name)
      const levels: string[] = []
      for (const [level, { width, height }] of scan.info.levels.entries()) {
        const { data } = await scan.readRegion({ x: 0, y: 0, width, height }, level)
        const digest = await crypto.subtle.digest('SHA-256', data as Uint8Array<ArrayBuffer>)
        levels.push(Array.from(new Uint8Array(digest), (byte) => byte.toString(16).padStart(2, '0')).join(''))
      }
      seen.push({ name: file.name, info: scan.info, levels })
      scan.close()
    }
    return seen
  }, source.address('worker/reading/openScan.ts'))
}

async function levelHashes(scan: Scan): Promise<string[]> {
  const hashes: string[] = []
  for (const [level, { width, height }] of scan.info.levels.entries()) {
    hashes.push(hash((await scan.readRegion({ x: 0, y: 0, width, height }, level)).data))
  }
  return hashes
}

function hash(samples: Uint8Array | Uint16Array): string {
  return createHash('sha256').update(samples).digest('hex')
}
