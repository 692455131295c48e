import { fileURLToPath } from 'node:url'
import { existsSync } from 'node:fs'
import type { BrowserContext, Page } from 'playwright-core'
import { preview } from 'vite'

const root = fileURLToPath(new URL('../..', import.meta.url))

export interface ServedPage {
  url: string
  close: () => Promise<void>
}

/** Serves the built page, as `npm start` does, on a free port. */
export async function servePage(): Promise<ServedPage> {
  if (!existsSync(`${root}/dist/page/index.html`)) {
    throw new Error('The page is not built; run `npm run build` first (`npm test` does).')
  }
  const server = await preview({
    configFile: `${root}/vite.config.ts`,
    logLevel: 'error',
    preview: { port: 0, strictPort: false, open: false },
  })
  const url = server.resolvedUrls?.local[0]
  if (!url) throw new Error('The preview server gave no address.')
  return { url, close: () => server.close() }
}

/** A page whose own errors fail the test: nothing may go wrong unsaid. */
export async function openPage(context: BrowserContext, url: string): Promise<{ page: Page; errors: string[] }> {
  const page = await context.newPage()
  const errors: string[] = []
  page.on('pageerror', (error) => errors.push(error.message))
  page.on('console', (message) => {
    if (message.type() === 'error') errors.push(message.text())
  })
  await page.goto(url)
  return { page, errors }
}

/** Waits until the page says that every edit is on disk. */
export async function saved(page: Page): Promise<void> {
  await page.waitForFunction(() => document.querySelector('[data-testid=saved]')?.textContent.startsWith('Saved'))
}

export async function numberIn(page: Page, testId: string): Promise<number> {
  const text = (await page.getByTestId(testId).textContent()) ?? ''
  return Number(/[\d.]+/.exec(text.replace(/[\u202f\u2009]/g, ''))?.[0])
}
