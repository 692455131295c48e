import { cpus } from 'node:os'
import { fileURLToPath } from 'node:url'
import type { Page } from 'playwright-core'
import { createServer } from 'vite'
import { bench, describe } from 'vitest'
import { launchChromium } from '../browser/chromium.ts'

/*
 * What a frame costs at 20,000 boundaries on a core of 150,000 px, in Chromium. Run by hand:
 *   npx vitest bench --run test/bench/view.bench.ts
 * Prints the script time of whole frames (all columns) beside that of a plain loop over all boundaries in one column, and
 * the time from one frame on screen to the next while the core scrolls.
 */

const root = fileURLToPath(new URL('../..', import.meta.url))

async function measure(): Promise<string[]> {
  const server = await createServer({ configFile: false, root, logLevel: 'error', server: { port: 0, hmr: false } })
  await server.listen()
  const browser = await launchChromium()
  try {
    const page = await browser.newPage({ viewport: { width: 1280, height: 960 } })
    await page.goto(`${server.resolvedUrls?.local[0] ?? ''}test/bench/view.html`)
    await page.waitForFunction(() => 'viewNames' in globalThis)
    return await rows(page)
  } finally {
    await browser.close()
    await server.close()
  }
}

async function rows(page: Page): Promise<string[]> {
  const lines = [`${cpus()[0].model}, ${cpus().length} cores, Chromium ${page.context().browser()?.version() ?? ''}`]
  for (const view of await page.evaluate<string[]>('viewNames')) {
    const call = (code: string) => page.evaluate<number[]>(code)
    await call(`script('${view}', 'all', 30)`)
    lines.push(`${view}: all columns, script  ${summary(await call(`script('${view}', 'all', 200)`))}`)
    lines.push(`${view}: plain loop, script   ${summary(await call(`script('${view}', 'plain loop', 200)`))}`)
    lines.push(`${view}: frame to frame       ${summary(await call(`onScreen('${view}', 240)`))}`)
  }
  return lines
}

function summary(times: number[]): string {
  const sorted = times.toSorted((a, b) => a - b)
  const mean = times.reduce((sum, time) => sum + time, 0) / times.length
  const sd = Math.sqrt(times.reduce((sum, time) => sum + (time - mean) ** 2, 0) / (times.length - 1))
  const p99 = sorted[Math.floor(0.99 * sorted.length)]
  return `min ${sorted[0].toFixed(2)}  mean ${mean.toFixed(2)} ± ${sd.toFixed(2)}  p99 ${p99.toFixed(2)} ms`
}

console.log((await measure()).join('\n'))

describe('the view', () => {
  // The figures above are the result: they are taken inside the page. Vitest asks for at least one bench of its own.
  bench('an empty round of the clock, for comparison', () => void performance.now(), { time: 50 })
})
