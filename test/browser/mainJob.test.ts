import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { BrowserContext, Page } from 'playwright-core'
import sharp from 'sharp'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { killChromium, launchPersistentChromium } from './chromium.ts'
import { numberIn, openPage, saved, servePage } from './page.ts'
import type { ServedPage } from './page.ts'

/** The demo photograph as a 16-bit-free TIFF of its own, so that the job begins with a file of the user's. */
async function demoAsTiff(): Promise<Buffer> {
  return sharp('sample-images/scans/askelmere-1.jpg')
    .tiff({ compression: 'lzw', resolutionUnit: 'inch', xres: 20, yres: 20 })
    .toBuffer()
}

describe('the main job in a real browser', () => {
  let served: ServedPage
  let folder: string
  let context: BrowserContext
  let page: Page
  let errors: string[]

  beforeAll(async () => {
    served = await servePage()
    folder = mkdtempSync(join(tmpdir(), 'winterclay-'))
    context = await launchPersistentChromium(folder, { viewport: { width: 1280, height: 800 }, acceptDownloads: true })
    ;({ page, errors } = await openPage(context, served.url))
  })
  afterAll(async () => {
    await context.close()
    await served.close()
    rmSync(folder, { recursive: true, force: true })
  })

  const step = (name: string) => page.getByRole('button', { name: new RegExp(`^\\d\\s*${name}$`) }).click()
  const press = async (key: string, times = 1) => {
    for (let i = 0; i < times; i++) await page.keyboard.press(key)
  }

  it('opens the demo at once, with proposals to confirm', async () => {
    await page.getByRole('button', { name: /^Begin/ }).waitFor()
    expect(await numberIn(page, 'years')).toBe(0)
    await press('Enter', 11)
    expect(await numberIn(page, 'years')).toBe(10)
  })

  it('opens a TIFF in a new project, sets its scale and moves the transect', async () => {
    await step('Report')
    await page.getByRole('button', { name: 'New project' }).click()
    await page
      .getByTestId('scan-files')
      .setInputFiles({ name: 'mine.tif', mimeType: 'image/tiff', buffer: await demoAsTiff() })
    await page.getByText('9314 × 640 px, 8 bit').waitFor()
    expect(await page.getByText(/Use the file’s 0\.05\d* mm per px/).count()).toBe(1)
    await page.getByLabel('Scale').fill('0,05')
    await page.getByLabel('Scale').press('Enter')
    await page.getByText('20.00 px per mm, typed.').waitFor()
    await page.getByLabel('Width').fill('300')
    await page.getByLabel('Width').press('Enter')
    // The line of the transect is dragged sideways on the core.
    const core = page.locator('.core canvas')
    const box = (await core.boundingBox())!
    const line = await page.evaluate(() => {
      const canvas = document.querySelector<HTMLCanvasElement>('.core canvas')!
      return canvas.getBoundingClientRect().width
    })
    expect(line).toBeGreaterThan(400)
    await page.mouse.move(
      box.x + 8 + 46 + 10 + 54 + 10 + (box.width - 8 - 46 - 54 - 130 - 104 - 66 - 62) / 2,
      box.y + 300,
    )
    await page.mouse.down()
    await page.mouse.move(box.x + 300, box.y + 302, { steps: 4 })
    await page.mouse.up()
    await saved(page)
  })

  it('confirms a hundred years by keyboard as A, and takes the last ones back', async () => {
    await step('Count')
    await page.getByTestId('counter-name').fill('A')
    await page.getByTestId('counter-name').press('Enter')
    await page.waitForFunction(() => /([1-9]\d\d) open/.test(document.body.textContent))
    await page.locator('body').click({ position: { x: 640, y: 20 } })
    await press('Enter', 101)
    expect(await numberIn(page, 'years')).toBe(100)
    await press('Control+z', 3)
    expect(await numberIn(page, 'years')).toBe(97)
    await press('Control+Shift+Z', 3)
    expect(await numberIn(page, 'years')).toBe(100)
    await press('d', 2)
    expect(await page.getByTestId('half-layer').textContent()).toMatch(/^101 ± 1/)
    await saved(page)
  })

  it('recounts as B without seeing the first count', async () => {
    await page.getByRole('button', { name: 'New count …' }).click()
    await page.getByTestId('counter-name').fill('B')
    await page.getByTestId('counter-name').press('Enter')
    await page.getByText('Blind: 1 other count out of sight').waitFor()
    expect(await numberIn(page, 'years')).toBe(0)
    await page.locator('body').click({ position: { x: 640, y: 20 } })
    await press('Enter', 50)
    await press('x')
    await press('Enter', 50)
    expect(await numberIn(page, 'years')).toBe(99)
    await saved(page)
  })

  it('loses nothing when the browser is killed', async () => {
    killChromium(folder)
    await context.close().catch(() => undefined)
    context = await launchPersistentChromium(folder, { viewport: { width: 1280, height: 800 }, acceptDownloads: true })
    const opened = await openPage(context, served.url)
    page = opened.page
    errors.push(...opened.errors)
    await page.getByTestId('count').waitFor()
    expect(await numberIn(page, 'years')).toBe(99)
    await page.getByTestId('count').selectOption({ label: 'A' })
    expect(await numberIn(page, 'years')).toBe(102)
  })

  it('gives a project file that opens again with everything, undo included', async () => {
    await step('Report')
    const download = page.waitForEvent('download')
    await page.getByRole('button', { name: 'Save project file' }).click()
    const path = await (await download).path()
    await page.getByRole('button', { name: 'New project' }).click()
    await page.getByText('Drop a core scan anywhere on this page').waitFor()
    await step('Report')
    await page.getByTestId('project-file').setInputFiles(path)
    await page.getByTestId('count').waitFor()
    await page.getByTestId('count').selectOption({ label: 'A' })
    expect(await numberIn(page, 'years')).toBe(102)
    await page.getByRole('button', { name: /^Undo/ }).click()
    await page.getByTestId('count').selectOption({ label: 'B' })
    expect(await numberIn(page, 'years')).toBe(98)
    expect(errors).toEqual([])
  })
})
