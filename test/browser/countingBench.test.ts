import { readFileSync } from 'node:fs'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { launchChromium } from './chromium.ts'
import { numberIn, openPage, saved, servePage } from './page.ts'
import type { ServedPage } from './page.ts'

/** Everything that a reader of the page, sighted or not, can find in it: words, values, names and titles. */
function everythingIn(page: Page): Promise<string> {
  return page.evaluate(() => {
    const attributes = ['aria-label', 'title', 'aria-description', 'aria-valuetext', 'alt', 'value', 'placeholder']
    const said = [...document.querySelectorAll('*')].flatMap((element) => [
      ...attributes.map((name) => element.getAttribute(name) ?? ''),
      element instanceof HTMLInputElement ? element.value : '',
    ])
    return `${document.body.textContent} ${said.join(' ')}`
  })
}

describe('the counting bench in a real browser', () => {
  let served: ServedPage
  let browser: Browser
  let page: Page
  let errors: string[]
  let homeFile = { name: 'by-e.winterclay.zip', mimeType: 'application/zip', buffer: Buffer.alloc(0) }
  beforeAll(async () => {
    served = await servePage()
    browser = await launchChromium()
    const context = await browser.newContext({ viewport: { width: 1280, height: 800 }, acceptDownloads: true })
    ;({ page, errors } = await openPage(context, served.url))
    page.setDefaultTimeout(10_000)
    await page.getByRole('button', { name: /^Begin/ }).waitFor({ timeout: 40_000 })
  })
  afterAll(async () => {
    await browser.close()
    await served.close()
  })

  const step = (name: string) => page.getByRole('button', { name: new RegExp(`^\\d\\s*${name}$`) }).click()
  const press = async (key: string, times = 1) => {
    for (let i = 0; i < times; i++) await page.keyboard.press(key)
  }
  const years = () => numberIn(page, 'years')
  const download = async (name: string) => {
    const waiting = page.waitForEvent('download')
    await page.getByRole('button', { name }).click()
    return (await waiting).path()
  }
  /** What is drawn of the core, as a picture. */
  const picture = () => page.evaluate(() => document.querySelector<HTMLCanvasElement>('.core canvas')!.toDataURL())
  const chooseCount = (label: string) => page.getByTestId('count').selectOption({ label })

  it('counts a hundred years by keyboard alone, with split, join, a note and the same again', async () => {
    await press('Enter', 99)
    expect(await years()).toBe(98)
    // The cursor stands on the next proposal: split the layer above it, then go on.
    await press('ArrowUp', 2)
    await press('s')
    expect(await years()).toBe(99)
    await press('.')
    expect(await years()).toBe(100)
    await press('j')
    expect(await years()).toBe(99)
    await press('m')
    await page.getByTestId('note').pressSequentially('two caps in one year')
    await press('Enter')
    expect(await page.getByText('1 note').count()).toBe(1)
    await press('g')
    expect(await page.getByTestId('next').textContent()).toMatch(/^Proposed year boundary/)
    await press('d')
    expect(await years()).toBe(100)
    expect(await page.getByTestId('half-layer').textContent()).toMatch(/^99\.5 ± 0\.5/)
  })

  it('goes through the least certain places one by one', async () => {
    await press('v')
    const first = await page.getByTestId('next').textContent()
    expect(first).toMatch(/probability (4|5)\d %/)
    await press('x')
    expect(await page.getByTestId('next').textContent()).not.toBe(first)
    expect(await page.getByTestId('next').textContent()).toMatch(/^(Proposed year boundary|Boundary)/)
    await press('Escape')
  })

  it('keeps a table in step, sorted, filtered and edited in place', async () => {
    await page.getByRole('button', { name: 'doubtful', exact: true }).click()
    expect(await numberIn(page, 'rows-shown')).toBe(1)
    await page.getByRole('grid').getByRole('button').nth(2).click()
    await page.getByLabel('Mark of this boundary').selectOption('certain')
    expect(await page.getByTestId('half-layer').textContent()).toMatch(/^100 ± 0/)
    await page.getByRole('button', { name: 'counted', exact: true }).click()
    await page
      .getByRole('columnheader', { name: /Thickness/ })
      .getByRole('button')
      .click()
    const thickness = await page.getByRole('grid').locator('[role=row] [role=gridcell]:nth-child(3)').allTextContents()
    const shown = thickness.map(Number).filter((value) => !Number.isNaN(value))
    expect(shown.length).toBeGreaterThan(5)
    expect(shown).toEqual(shown.toSorted((a, b) => a - b))
    await page.getByRole('columnheader', { name: /Year/ }).getByRole('button').click()
    await page.getByLabel('Layers; up and down').evaluate((body) => (body.scrollTop = 0))
    await page.getByRole('grid').getByRole('button', { name: '1.49', exact: true }).click()
    await page.getByLabel('Depth of this boundary').fill('1,62')
    await page.getByLabel('Depth of this boundary').press('Enter')
    expect(await page.getByTestId('provenance').textContent()).toContain('Moved to')
    await press('Control+z')
    await page.getByRole('grid').getByRole('button', { name: '1.49', exact: true }).waitFor()
  })

  it('takes all of it back, edit by edit', async () => {
    await press('Control+z', 95)
    while ((await years()) > 0) await press('Control+z')
    while (await page.getByRole('button', { name: /^Redo/ }).isEnabled()) await press('Control+Shift+Z', 10)
    expect(await years()).toBe(100)
    await saved(page)
  }, 120_000)
  it('shows a blind counter no earlier mark anywhere: not on the page, in the table, on the core or to any key', async () => {
    await page.getByRole('button', { name: 'New count …' }).click()
    await page.getByLabel('Hide the machine’s proposals too').check()
    await page.getByTestId('counter-name').fill('E')
    await page.getByTestId('counter-name').press('Enter')
    await page.getByText('Blind: 4 other counts out of sight').waitFor()
    expect(await years()).toBe(0)
    expect(await page.getByRole('grid').locator('[role=row]').count()).toBe(1)
    const words = await everythingIn(page)
    expect(words).not.toContain('two caps in one year')
    // Depths of earlier boundaries, as the table and the lines beside it write them.
    for (const depth of ['0.71', '1.49', '11.63']) expect(words).not.toContain(depth)
    const before = await page.getByTestId('next').textContent()
    for (const key of ['ArrowDown', 'ArrowUp', 'n', 'q', 'g', 'v', 'Shift+N', 'Shift+Q', 'Enter', '.']) await press(key)
    expect(await page.getByTestId('next').textContent()).toBe(before)
    expect(await years()).toBe(0)
    await step('Compare')
    expect(await page.getByTestId('sealed').textContent()).toMatch(/stay\s+out\s+of\s+sight/)
    expect(await page.getByText('Where they differ').count()).toBe(0)
  })

  it('sends a packet out, counts there as if no one had, and brings the count home beside the others', async () => {
    const packet = await download('Save a counting packet')
    const elsewhere = await browser.newContext({ viewport: { width: 1280, height: 800 }, acceptDownloads: true })
    const there = await openPage(elsewhere, served.url)
    const colleague = there.page
    await colleague.getByRole('button', { name: /^Begin/ }).waitFor({ timeout: 40_000 })
    await colleague.getByRole('button', { name: /^6\s*Report$/ }).click()
    await colleague.getByTestId('project-file').setInputFiles(packet)
    await colleague.getByText('Set the depth').or(colleague.getByText('Transect')).first().waitFor()
    await colleague.getByRole('button', { name: /^2\s*Count$/ }).click()
    await colleague.getByLabel('Hide the machine’s proposals too').check()
    await colleague.getByTestId('counter-name').fill('E')
    await colleague.getByTestId('counter-name').press('Enter')
    await step('Count')
    for (const one of [page, colleague]) {
      await one.locator('body').click({ position: { x: 640, y: 20 } })
      await one.keyboard.press('0')
    }
    // The blind bench at home looks, pixel for pixel, like a bench where nobody ever counted.
    const bench = (on: Page) =>
      on.evaluate(() => document.querySelector<HTMLCanvasElement>('.core canvas')!.toDataURL())
    await expect.poll(async () => (await bench(colleague)) === (await picture()), { timeout: 15_000 }).toBe(true)

    await colleague.getByText('How proposals are found').click()
    await colleague.getByLabel('Hide the proposals while I count').uncheck()
    await colleague.getByText(/[1-9]\d\d open/).waitFor()
    await colleague.locator('body').click({ position: { x: 640, y: 20 } })
    for (let i = 0; i < 51; i++) await colleague.keyboard.press('Enter')
    expect(await numberIn(colleague, 'years')).toBe(50)
    await colleague.getByRole('button', { name: /^6\s*Report$/ }).click()
    const saving = colleague.waitForEvent('download')
    await colleague.getByRole('button', { name: 'Save project file' }).click()
    homeFile = { ...homeFile, buffer: readFileSync(await (await saving).path()) }
    expect(there.errors).toEqual([])

    await chooseCount('A')
    const ofA = await years()
    await step('Compare')
    await page.getByTestId('count-home').setInputFiles(homeFile)
    await page.getByText('brought home: the count of E').waitFor()
    await step('Count')
    expect(await years()).toBe(ofA)
    await chooseCount('E 2')
    expect(await years()).toBe(50)
    await press('Control+z')
    expect(await page.getByTestId('count').locator('option').allTextContents()).toEqual(['A', 'B', 'C', 'You', 'E'])
    await press('Control+Shift+Z')
    await chooseCount('E 2')
    expect(await years()).toBe(50)
    await elsewhere.close()
  }, 90_000)

  it('refuses to bring the same count home twice, in words', async () => {
    await step('Compare')
    await page.getByTestId('count-home').setInputFiles(homeFile)
    await page.getByText('Every count of this file is in this project already').waitFor()
  })

  it('settles differences with a reason, into an agreed count, and takes that back', async () => {
    await step('Count')
    await chooseCount('A')
    await step('Compare')
    await page.getByRole('button', { name: 'Begin the agreed count' }).click()
    await page.getByTestId('agreed').waitFor()
    expect(await page.getByTestId('agreed').textContent()).toMatch(/;\s+0 of \d+ differences settled/)
    const first = await page.getByTestId('difference').textContent()
    await press('n')
    expect(await page.getByTestId('difference').textContent()).not.toBe(first)
    await press('Shift+N')
    expect(await page.getByTestId('difference').textContent()).toBe(first)
    // Without a reason nothing is settled: the key leads to the field that asks for it.
    await press('y')
    await page.keyboard.type('cap runs across the core')
    await press('Enter')
    await press('y')
    await page.getByText(/;\s+1 of \d+ differences settled/).waitFor()
    expect(await page.getByTestId('difference').textContent()).not.toBe(first)
    await press('x')
    await page.getByText(/;\s+2 of \d+ differences settled/).waitFor()
    await press('Control+z')
    await page.getByText(/;\s+1 of \d+ differences settled/).waitFor()
    await step('Count')
    await chooseCount('Agreed')
    await page.getByText(/^\d notes?$/).click()
    expect(await page.getByTestId('notes').textContent()).toContain('Settled as a year: cap runs across the core')
    await step('Compare')
    await press('Control+z', 2)
    await step('Count')
    expect(await page.getByTestId('count').locator('option').allTextContents()).not.toContain('Agreed')
    await chooseCount('A')
    await step('Compare')
    await page.getByRole('button', { name: 'Begin the agreed count' }).waitFor()
  })

  it('looks at the project as of an earlier edit, read-only, and returns', async () => {
    await step('Count')
    await chooseCount('You')
    const now = await years()
    await step('Report')
    for (;;) {
      const earlier = page.getByRole('button', { name: 'Earlier edits' })
      if ((await earlier.count()) === 0) break
      await earlier.click()
    }
    await page.getByRole('button', { name: 'Look at the project as of edit 12', exact: true }).click()
    expect(await page.getByTestId('past').textContent()).toContain('10 marks then')
    await step('Count')
    expect(await years()).toBe(10)
    await page.locator('body').click({ position: { x: 640, y: 20 } })
    await press('Enter', 2)
    await page.getByText('to look at only. Return to the present to change it').first().waitFor()
    expect(await years()).toBe(10)
    await page.getByRole('button', { name: 'Return to the present' }).click()
    expect(await years()).toBe(now)
    await saved(page)
    expect(errors).toEqual([])
  })
})
