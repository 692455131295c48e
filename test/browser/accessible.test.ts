import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { launchChromium } from './chromium.ts'
import { openPage, servePage } from './page.ts'
import type { ServedPage } from './page.ts'

interface AxeResult {
  violations: { id: string; help: string; nodes: { target: unknown[]; failureSummary?: string }[] }[]
}

const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
const steps = ['Scan', 'Count', 'Compare', 'Date', 'Rates', 'Report']

/** Breaches of WCAG 2.2 A and AA that axe-core finds on the page as it stands. */
async function breaches(page: Page): Promise<string[]> {
  await page.evaluate(axe)
  const { violations } = await page.evaluate(() =>
    (window as unknown as { axe: { run: (context: Document, options: object) => Promise<AxeResult> } }).axe.run(
      document,
      {
        runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'],
      },
    ),
  )
  return violations.flatMap(({ id, nodes }) =>
    nodes.map(({ target, failureSummary }) => `${id}: ${JSON.stringify(target)} ${failureSummary ?? ''}`),
  )
}

describe.each(['light', 'dark'] as const)('the page in the %s', (colorScheme) => {
  let served: ServedPage
  let browser: Browser
  let page: Page
  beforeAll(async () => {
    served = await servePage()
    browser = await launchChromium()
    ;({ page } = await openPage(
      await browser.newContext({ colorScheme, viewport: { width: 1280, height: 800 } }),
      served.url,
    ))
    await page.getByRole('button', { name: /^Begin/ }).waitFor()
    await page.getByTestId('count').selectOption({ label: 'A' })
    await page.keyboard.press('Enter')
  })
  afterAll(async () => {
    await browser.close()
    await served.close()
  })

  it.each(steps)('breaks no rule of WCAG 2.2 AA that axe-core can test, step %s', async (name) => {
    await page.getByRole('button', { name: new RegExp(`^\\d\\s*${name}$`) }).click()
    if (name === 'Date' || name === 'Rates')
      await page.getByRole('img', { name: /boundaries down to|Thickness of/ }).waitFor()
    expect(await breaches(page)).toEqual([])
  })

  it('breaks none in the list of keys', async () => {
    await page.keyboard.press('?')
    await page.getByRole('heading', { name: 'Keys' }).waitFor()
    expect(await breaches(page)).toEqual([])
    await page.keyboard.press('Escape')
  })

  it('has no sideways scrolling at 200 % zoom of a 1280 px window', async () => {
    await page.setViewportSize({ width: 640, height: 400 })
    expect(
      await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth),
    ).toBeLessThanOrEqual(0)
    await page.setViewportSize({ width: 1280, height: 800 })
  })
})
