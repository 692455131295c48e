import { cpus } from 'node:os'
import type { Page } from 'playwright-core'
import { bench, describe } from 'vitest'
import { launchChromium } from '../browser/chromium.ts'
import { openPage, servePage } from '../browser/page.ts'

/*
 * From key to painted frame on the counting bench with 20,000 boundaries, in the built page. Run by hand:
 *   npm run build && npx vitest bench --run test/bench/counting.bench.ts
 * Prints the time from the key to the end of the task that painted the frame; waiting for the screen's next refresh, up to
 * 17 ms at 60 Hz, is part of it, so the script time of the key itself stands beside it.
 */

const boundaries = 20_000

/** Milliseconds of script in the key's own task, and from the key to after its frame, for each press. */
async function press(page: Page, key: string, times: number): Promise<[script: number, painted: number][]> {
  return page.evaluate(
    async ([name, many]) => {
      const rows: [number, number][] = []
      for (let i = 0; i < many; i++) {
        const start = performance.now()
        document.body.dispatchEvent(new KeyboardEvent('keydown', { key: name, bubbles: true, cancelable: true }))
        await Promise.resolve()
        const script = performance.now() - start
        await new Promise<void>((done) =>
          requestAnimationFrame(() => {
            const channel = new MessageChannel()
            channel.port1.onmessage = () => done()
            channel.port2.postMessage(null)
          }),
        )
        rows.push([script, performance.now() - start])
      }
      return rows
    },
    [key, times] as const,
  )
}

function summary(times: number[]): string {
  const sorted = times.toSorted((a, b) => a - b)
  const at = (share: number) => sorted[Math.floor(share * (sorted.length - 1))].toFixed(2)
  return `min ${at(0)}  median ${at(0.5)}  p95 ${at(0.95)} ms`
}

async function measure(): Promise<string[]> {
  const served = await servePage()
  const browser = await launchChromium()
  try {
    const { page } = await openPage(await browser.newContext({ viewport: { width: 1280, height: 800 } }), served.url)
    await page.getByRole('button', { name: /^Begin/ }).waitFor({ timeout: 60_000 })
    await page.getByRole('button', { name: /^3\s*Compare$/ }).click()
    const rows = Array.from({ length: boundaries }, (_, i) => (0.05 + i * 0.0232).toFixed(4))
    const file = { name: 'many.csv', mimeType: 'text/csv', buffer: Buffer.from(`depth_mm\n${rows.join('\n')}\n`) }
    await page.getByTestId('count-file').setInputFiles(file)
    await page.getByRole('button', { name: /^Take in/ }).click()
    await page.getByRole('button', { name: /^2\s*Count$/ }).click()
    await page.getByTestId('count').selectOption({ label: 'many' })
    await page.locator('body').click({ position: { x: 640, y: 20 } })
    const lines = [
      `${cpus()[0].model}, ${cpus().length} cores, Chromium ${browser.version()}, ${boundaries} boundaries`,
    ]
    for (const key of ['ArrowDown', 'ArrowUp']) {
      await press(page, key, 10)
      const taken = await press(page, key, 60)
      lines.push(`${key.padEnd(10)} script ${summary(taken.map(([script]) => script))}`)
      lines.push(`${''.padEnd(10)} frame  ${summary(taken.map(([, painted]) => painted))}`)
    }
    return lines
  } finally {
    await browser.close()
    await served.close()
  }
}

console.log((await measure()).join('\n'))

describe('the counting bench', () => {
  // The figures above are the result: they are taken inside the page. Vitest asks for at least one bench of its own.
  bench('an empty round of the clock, for comparison', () => void performance.now(), { time: 50 })
})
