import { execFileSync } from 'node:child_process'
import { cpus } from 'node:os'
import { fileURLToPath } from 'node:url'
import { bench, describe } from 'vitest'
import { openSourcePage } from '../browser/readingPage.ts'
import { browserMemory, browserSeconds, watchMemory } from './browserMemory.ts'
import { drawScans } from './drawScans.ts'
import type { DrawnScan } from './drawScans.ts'
import { headlessColumn } from './headlessColumn.ts'
import type { ReadingTimes } from './readingWorker.ts'

/*
 * Reads a column of 200 pixels over the whole length of large drawn scans: in Chromium (in a worker, as the page does),
 * headless, and with Pillow or tifffile and numpy in the same run. Run by hand; draws 1 GB of scans when first run:
 *   npx vitest bench --run test/bench/reading.bench.ts
 * WINTERCLAY_PYTHON names a Python that has numpy, Pillow and tifffile (default /usr/bin/python3); WINTERCLAY_ROUNDS how
 * often all is repeated (default 3), WINTERCLAY_SCANS a part of the names of the scans to read.
 */

const python = process.env.WINTERCLAY_PYTHON ?? '/usr/bin/python3'
const rounds = Number(process.env.WINTERCLAY_ROUNDS ?? 3)
const chosen = process.env.WINTERCLAY_SCANS ?? ''
const column = { x: 1400, width: 200, rows: 2048 }

interface Figures {
  /** Seconds from the file to the whole column, opening and hashing included. */
  total: number
  picture: number
  /** Processor seconds over all threads: what the work costs on a machine that is busy with other things too. */
  cpu: number
  /** Bytes above idle; headless not measured apart from the runner. */
  memory: number
  /** Longest task on the page's main thread, ms. */
  longest: number
  sum: number
}

/** What peer.py prints. */
interface PeerAnswer {
  seconds: number
  cpu: number
  peak: number
  how: string
  sum: number
}

async function inChromium({ path }: DrawnScan): Promise<Figures> {
  const mark = `--winterclay-bench=${process.pid}`
  const { page, address, pick, close } = await openSourcePage([mark])
  await pick([path])
  // Once without a file: what the page needs to load the worker is not the reader's cost.
  await page.waitForTimeout(500)
  const idle = browserMemory(mark)
  const highest = watchMemory(mark)
  const before = browserSeconds(mark)
  const { times, longest } = await page.evaluate(runWorker, { address: address('test/bench/readingWorker.ts'), column })
  const memory = highest() - idle
  const cpu = browserSeconds(mark) - before
  await close()
  return {
    total: (times.open + times.column) / 1000,
    picture: (times.open + times.picture) / 1000,
    cpu,
    memory,
    longest,
    sum: times.sum,
  }
}

/** Runs in the page. */
async function runWorker({
  address,
  column,
}: {
  address: string
  column: { x: number; width: number; rows: number }
}): Promise<{ times: ReadingTimes; longest: number }> {
  let longest = 0
  const observer = new PerformanceObserver((list) => {
    for (const entry of list.getEntries()) longest = Math.max(longest, entry.duration)
  })
  observer.observe({ entryTypes: ['longtask'] })
  const worker = new Worker(address, { type: 'module' })
  const file = document.querySelector<HTMLInputElement>('#files')!.files![0]
  worker.postMessage({ file, ...column })
  const times = await new Promise<ReadingTimes>((resolve, reject) => {
    worker.onmessage = (event: MessageEvent<ReadingTimes>) => resolve(event.data)
    worker.onerror = (event) => reject(new Error(event.message))
  })
  observer.disconnect()
  worker.terminate()
  return { times, longest }
}

async function headless({ path }: DrawnScan): Promise<Figures> {
  const before = process.cpuUsage()
  const times = await headlessColumn(path, column.x, column.width, column.rows)
  const { user, system } = process.cpuUsage(before)
  const total = (times.open + times.column) / 1000
  return { total, picture: NaN, cpu: (user + system) / 1e6, memory: NaN, longest: NaN, sum: times.sum }
}

function peer({ path }: DrawnScan): Figures & { how: string } {
  const script = fileURLToPath(new URL('peer.py', import.meta.url))
  const answer = execFileSync(python, [script, path, String(column.x), String(column.width)], { encoding: 'utf8' })
  const { seconds, ...rest } = JSON.parse(answer) as PeerAnswer
  return { total: seconds, picture: NaN, longest: NaN, ...rest, memory: rest.peak }
}

const least = (values: number[]) => Math.min(...values)
const spread = (values: number[]) => {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length
  const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / Math.max(1, values.length - 1)
  return `${least(values).toFixed(2)} s (mean ${mean.toFixed(2)} +- ${Math.sqrt(variance).toFixed(2)})`
}
const processor = (figures: Figures[]) => `${least(figures.map(({ cpu }) => cpu)).toFixed(2)} s of processor time`
const megabytes = (bytes: number) => `${Math.round(bytes / 1e6)} MB`

async function compare(scan: DrawnScan): Promise<void> {
  const page: Figures[] = []
  const command: Figures[] = []
  const peers: (Figures & { how: string })[] = []
  for (let round = 0; round < rounds; round++) {
    peers.push(peer(scan))
    page.push(await inChromium(scan))
    command.push(await headless(scan))
  }
  const totals = (figures: Figures[]) => figures.map(({ total }) => total)
  const sums = new Set([...page, ...command, ...peers].map(({ sum }) => sum))
  console.log(
    [
      `${scan.name}${sums.size > 1 ? `: THE SUMS DIFFER ${[...sums].join(', ')}` : ''}`,
      `  ${peers[0].how}: ${spread(totals(peers))}, ${processor(peers)}, ${megabytes(least(peers.map(({ memory }) => memory)))}`,
      `  headless: ${spread(totals(command))}, ${processor(command)}, ${(least(totals(peers)) / least(totals(command))).toFixed(2)} times as fast`,
      `  Chromium: ${spread(totals(page))}, ${processor(page)}, ${(least(totals(peers)) / least(totals(page))).toFixed(2)} times as fast, ${megabytes(least(page.map(({ memory }) => memory)))} above idle`,
      `  Chromium: first picture after ${least(page.map(({ picture }) => picture)).toFixed(2)} s, longest task of the main thread ${Math.round(least(page.map(({ longest }) => longest)))} ms`,
    ].join('\n'),
  )
}

console.log(`${cpus().length} x ${cpus()[0].model}, Node ${process.version}, least of ${rounds} rounds`)
for (const scan of (await drawScans()).filter(({ name }) => name.includes(chosen))) await compare(scan)

describe('reading large scans (figures above)', () => {
  // The figures are printed above; the runner asks for something to time.
  bench(
    'adding two numbers',
    () => {
      least([1, 2])
    },
    { iterations: 10, time: 0 },
  )
})
