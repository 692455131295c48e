import { mkdirSync } from 'node:fs'
import { bench } from 'vitest'
import { launchChromium } from '../browser/chromium.ts'
import { openPage, servePage } from '../browser/page.ts'

/** Takes the README's pictures anew from the built page: `npx vitest bench --run test/bench/tour.bench.ts`. */
bench(
  'pictures of the tour',
  async () => {
    const folder = 'sample-images/tour'
    mkdirSync(folder, { recursive: true })
    const served = await servePage()
    const browser = await launchChromium()
    const { page } = await openPage(await browser.newContext({ viewport: { width: 1280, height: 800 } }), served.url)
    await page.getByRole('button', { name: /^Begin/ }).waitFor()
    for (let i = 0; i < 25; i++) await page.keyboard.press('Enter')
    await page.keyboard.press('d')
    await page.waitForTimeout(1500)
    await page.screenshot({ path: `${folder}/count.png` })
    await page.getByTestId('count').selectOption({ label: 'A' })
    for (const step of ['Scan', 'Compare', 'Date']) {
      await page.getByRole('button', { name: new RegExp(`^\\d\\s*${step}$`) }).click()
      await page.waitForTimeout(2500)
      await page.screenshot({ path: `${folder}/${step.toLowerCase()}.png` })
    }
    await browser.close()
    await served.close()
  },
  { iterations: 1, time: 0, warmupIterations: 0, warmupTime: 0 },
)
