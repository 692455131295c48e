import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { launchPersistentChromium } from './chromium.ts'
import { serveSource } from './serveSource.ts'

/*
 * The stores in a real Chromium: what a test under Node cannot show. The page `storesPage.ts` offers `stores.*`.
 */
describe('the stores in a real browser', () => {
  let server: Awaited<ReturnType<typeof serveSource>>
  let context: BrowserContext
  let url: string
  const folder = mkdtempSync(join(tmpdir(), 'winterclay-stores-'))

  beforeAll(async () => {
    server = await serveSource()
    url = `${server.url}test/browser/storesPage.html`
    context = await launchPersistentChromium(folder)
  })
  afterAll(async () => {
    await context.close()
    await server.close()
    rmSync(folder, { recursive: true, force: true })
  })

  async function open(): Promise<Page> {
    const page = await context.newPage()
    await page.goto(url)
    await page.waitForFunction(() => 'stores' in globalThis)
    return page
  }

  // First: Chromium remembers for a while how much room there was at the last write.
  it('says so when the storage is full, for scans and edits alike, and goes on when there is room', async () => {
    const page = await open()
    expect(await page.evaluate('stores.claim()')).toBe(true)
    const session = await context.newCDPSession(page)
    const { origin } = new URL(url)
    await session.send('Storage.overrideQuotaForOrigin', { origin, quotaSize: 20_000 })
    expect(await page.evaluate('stores.create()')).toBe('done')
    expect(await page.evaluate('stores.keepScan(2_000_000)')).toBe(
      'the browser could not keep a copy of lake.tif (2.0 MB): its storage is full. ' +
        'Free disk space, or save project files and remove projects you no longer need',
    )
    expect(await page.evaluate('stores.editLarge()')).toBe(
      'the browser could not store the edit: its storage is full. ' +
        'Free disk space, or save project files and remove projects you no longer need',
    )
    expect(await page.evaluate('stores.version()')).toBe(3)
    await session.send('Storage.overrideQuotaForOrigin', { origin })
    await page.waitForFunction("stores.editLarge().then((ending) => ending === 'done')")
    expect(await page.evaluate('stores.version()')).toBe(4)
    await page.close()
  })

  it('lets one tab write, tells the second, and lets it write once the first is closed', async () => {
    const first = await open()
    const second = await open()
    expect(await first.evaluate('stores.claim()')).toBe(true)
    expect(await second.evaluate('stores.claim()')).toBe(false)
    expect(await first.evaluate('stores.create()')).toBe('done')
    expect(await first.evaluate('stores.edit()')).toBe('done')
    expect(await second.evaluate('stores.version()')).toBe(4)
    expect(await second.evaluate('stores.edit()')).toBe(
      'this project is open in another tab, which does the writing; close that tab, then reload this one',
    )
    await first.close()
    // The browser gives the lock back a moment after the tab is gone; waitForFunction would take the promise itself for true.
    await expect.poll(() => second.evaluate('stores.claim()'), { timeout: 10_000 }).toBe(true)
    expect(await second.evaluate('stores.edit()')).toBe('done')
    expect(await second.evaluate('stores.version()')).toBe(5)
    expect(await second.evaluate('stores.reclaim()')).toBe(true)
    await second.close()
  })

  it('keeps copies of scans over a visit', async () => {
    const page = await open()
    expect(await page.evaluate('stores.keepScan(3_000_000)')).toBe('done')
    await page.close()
    const again = await open()
    expect(await again.evaluate('stores.scanSize()')).toBe(3_000_000)
    await again.close()
  })
})
