import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { bench, describe } from 'vitest'
import { sharpDecoders } from '../../src/headless/sharpDecoders.ts'
import { openSharpScan } from '../../src/headless/sharpScan.ts'
import { seededRandom } from '../../worker/random.ts'
import type * as Reading from '../../worker/reading/openScan.ts'
import type { Scan } from '../../worker/reading/scanFile.ts'
import { openScanWith } from '../../worker/reading/openScan.ts'
import { openSourcePage } from '../browser/readingPage.ts'
import type { Loading } from '../browser/readingPage.ts'
import { mutate } from '../fixtures/mutate.ts'
import type * as Mutating from '../fixtures/mutate.ts'
import { readMutant } from '../fixtures/readMutant.ts'
import type * as Mutants from '../fixtures/readMutant.ts'
import { seedScans } from '../fixtures/seedScans.ts'
import { browserMemory, watchMemory } from './browserMemory.ts'

/*
 * Reads ten thousand damaged files of every kind, in Chromium, with the page's reader under Node, and headless with sharp:
 * each must be refused in words or read, within 20 s, and memory must stay below 1 GB. Run by hand, about half an hour:
 *   npx vitest bench --run test/bench/malformedScans.bench.ts
 * WINTERCLAY_MUTANTS and WINTERCLAY_SEED change number and first seed.
 */

const count = Number(process.env.WINTERCLAY_MUTANTS ?? 10_000)
const first = Number(process.env.WINTERCLAY_SEED ?? 0)
const patience = 20_000
const seeds = await seedScans()

type Tally = Record<string, number>

async function inNode(
  open: (mutant: Uint8Array, name: string) => Promise<Scan>,
  name: string,
  bytes: Uint8Array,
): Promise<Tally> {
  const tally: Tally = {}
  for (let seed = first; seed < first + count; seed++) {
    const mutant = mutate(bytes, seed)
    const outcome = await Promise.race([
      readMutant(() => open(mutant, name), seededRandom(seed)).catch(
        (error: unknown) => `WRONG at seed ${seed}: ${String(error)}`,
      ),
      new Promise<string>((resolve) => setTimeout(resolve, patience, `WRONG at seed ${seed}: hangs`).unref()),
    ])
    tally[outcome] = (tally[outcome] ?? 0) + 1
  }
  return tally
}

function line(where: string, name: string, tally: Tally, memory: number): string {
  const parts = Object.entries(tally).map(([outcome, times]) => `${times} ${outcome}`)
  return `${where}, ${name}: ${parts.sort().join(', ')}; memory up to ${Math.round(memory / 1e6)} MB`
}

async function allInNode(): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'winterclay-mutants-'))
  for (const { name, bytes } of seeds) {
    const own = await inNode(
      (mutant) => openScanWith(sharpDecoders, new Blob([new Uint8Array(mutant)]), name),
      name,
      bytes,
    )
    console.log(line('page reader under Node', name, own, process.memoryUsage().rss))
    const path = join(folder, name)
    const headless = await inNode(
      (mutant) => {
        writeFileSync(path, mutant)
        return openSharpScan(path)
      },
      name,
      bytes,
    )
    console.log(line('headless', name, headless, process.memoryUsage().rss))
  }
  rmSync(folder, { recursive: true })
}

async function allInChromium(): Promise<void> {
  const mark = `--winterclay-bench=${process.pid}`
  const { page, address, pick, close } = await openSourcePage([mark])
  const folder = mkdtempSync(join(tmpdir(), 'winterclay-mutants-'))
  const idle = browserMemory(mark)
  for (const { name, bytes } of seeds) {
    const path = join(folder, name)
    writeFileSync(path, bytes)
    await pick([path])
    const highest = watchMemory(mark)
    const addresses = [
      'worker/reading/openScan.ts',
      'test/fixtures/mutate.ts',
      'test/fixtures/readMutant.ts',
      'worker/random.ts',
    ].map(address)
    const tally = await page.evaluate(readAll, { addresses, count, first, patience })
    console.log(line(`Chromium (${Math.round(idle / 1e6)} MB idle)`, name, tally, highest()))
  }
  await close()
  rmSync(folder, { recursive: true })
}

/** Runs in the page: damages the picked file over and over and reads it. */
async function readAll({
  addresses,
  count,
  first,
  patience,
}: {
  addresses: string[]
  count: number
  first: number
  patience: number
}): Promise<Tally> {
  const load = (globalThis as unknown as Loading<unknown>).load
  const [reading, mutating, mutants, random] = (await Promise.all(addresses.map((address) => load(address)))) as [
    typeof Reading,
    typeof Mutating,
    typeof Mutants,
    { seededRandom: typeof seededRandom },
  ]
  const file = document.querySelector<HTMLInputElement>('#files')!.files![0]
  const bytes = new Uint8Array(await file.arrayBuffer())
  const tally: Tally = {}
  for (let seed = first; seed < first + count; seed++) {
    const mutant = new Blob([new Uint8Array(mutating.mutate(bytes, seed))])
    const outcome = await Promise.race([
      mutants
        .readMutant(() => reading.openScan(mutant, file.name), random.seededRandom(seed))
        .catch((error: unknown) => `WRONG at seed ${seed}: ${String(error)}`),
      new Promise<string>((resolve) => setTimeout(resolve, patience, `WRONG at seed ${seed}: hangs`)),
    ])
    tally[outcome] = (tally[outcome] ?? 0) + 1
  }
  return tally
}

await allInChromium()
await allInNode()

describe(`damaged scans, ${count} of each kind (figures above)`, () => {
  // The figures are printed above; the runner asks for something to time.
  bench(
    'damaging one file',
    () => {
      mutate(seeds[0].bytes, first)
    },
    { iterations: 10, time: 0 },
  )
})
