import { strToU8, unzipSync, zipSync } from 'fflate'
import type { Browser, Page } from 'playwright-core'
import sharp from 'sharp'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { crc32 } from '../../worker/reading/crc32.ts'
import { launchChromium } from './chromium.ts'
import { openPage, saved, servePage } from './page.ts'
import type { ServedPage } from './page.ts'

/** Grain, so that a file of it is long enough to be cut in the middle. */
const grain = {
  create: {
    width: 60,
    height: 400,
    channels: 3 as const,
    background: '#777',
    noise: { type: 'gaussian' as const, mean: 120, sigma: 30 },
  },
}

describe('bad input in the page', () => {
  let served: ServedPage
  let browser: Browser
  let page: Page
  let errors: string[]
  let before: string
  let projectFile: Buffer

  beforeAll(async () => {
    served = await servePage()
    browser = await launchChromium()
    ;({ page, errors } = await openPage(await browser.newContext({ acceptDownloads: true }), served.url))
    await page.getByRole('button', { name: /^Begin/ }).waitFor()
    await page.keyboard.press('Enter')
    for (let i = 0; i < 3; i++) await page.keyboard.press('Enter')
    await saved(page)
    await page.getByRole('button', { name: /6\s*Report/ }).click()
    const download = page.waitForEvent('download')
    await page.getByRole('button', { name: 'Save project file' }).click()
    const stream = await (await download).createReadStream()
    projectFile = Buffer.concat(await stream.toArray())
    before = await state()
  })
  afterAll(async () => {
    await browser.close()
    await served.close()
  })

  /** What must stay as it is: edits made, sections, and the history's last line. */
  const state = async () =>
    (await page.locator('section.panel table').last().innerText()).split('\n').slice(0, 3).join('|')

  async function refused(input: 'scan-files' | 'project-file', name: string, bytes: Buffer, message: RegExp) {
    await page.getByRole('button', { name: input === 'scan-files' ? /1\s*Scan/ : /6\s*Report/ }).click()
    await page.getByTestId(input).setInputFiles({ name, mimeType: 'application/octet-stream', buffer: bytes })
    const notice = page.locator('.notice.trouble')
    await notice.waitFor({ timeout: 10_000 })
    const words = await notice.locator('p').innerText()
    await notice.getByRole('button', { name: 'Dismiss' }).click()
    expect(words).toMatch(message)
    await page.getByRole('button', { name: /6\s*Report/ }).click()
    expect(await state()).toBe(before)
  }

  const tiff = () => sharp(grain).tiff({ compression: 'lzw' }).toBuffer()
  const jpeg = () => sharp(grain).jpeg().toBuffer()

  it.each<[string, string, () => Promise<Buffer> | Buffer, RegExp]>([
    ['an empty file', 'core.tif', () => Buffer.alloc(0), /core\.tif .*empty/i],
    ['text renamed to .png', 'core.png', () => Buffer.from('depth,mark\n1,certain\n'), /core\.png .*(not a|no) /i],
    ['a truncated TIFF', 'core.tif', async () => (await tiff()).subarray(0, 3000), /core\.tif .*(end|cut|truncat)/i],
    ['a truncated JPEG', 'core.jpg', async () => (await jpeg()).subarray(0, 5000), /core\.jpg .*(end|cut|truncat)/i],
    ['a CMYK JPEG', 'core.jpg', () => sharp(grain).toColourspace('cmyk').jpeg().toBuffer(), /core\.jpg .*CMYK/],
    ['an image of 0 x 0', 'core.png', pngOfNothing, /core\.png .*0/],
  ])('%s is refused in words and the project stays as it was', async (_what, name, make, message) => {
    await refused('scan-files', name, Buffer.from(await make()), message)
  })

  it('a project file of a newer version is refused, naming both versions', async () => {
    await refused(
      'project-file',
      'newer.zip',
      rewritten((project) => ({ ...project, schema: 99 })),
      /99/,
    )
  })

  it('a project file with a wrong hash is refused, naming the member', async () => {
    const members = unzipSync(projectFile)
    const name = Object.keys(members).find((path) => path.startsWith('journal'))!
    members[name] = new Uint8Array([...members[name], 10])
    await refused('project-file', 'altered.zip', Buffer.from(zipSync(members)), /journal/)
  })

  it('a project file with hostile keys is refused and touches no prototype', async () => {
    const members = unzipSync(projectFile)
    members['../escape.txt'] = strToU8('x')
    await refused('project-file', 'hostile.zip', Buffer.from(zipSync(members)), /escape|\.\./)
    const text = Buffer.from(unzipSync(projectFile)['project.json']).toString()
    const polluted = text.replace('{', '{"__proto__":{"polluted":true},')
    await refused(
      'project-file',
      'hostile.zip',
      Buffer.from(zipSync({ ...unzipSync(projectFile), 'project.json': strToU8(polluted) })),
      /__proto__/,
    )
    expect(await page.evaluate(() => 'polluted' in {})).toBe(false)
  })

  it('says nothing on the console while it refuses', () => {
    expect(errors).toEqual([])
  })

  function rewritten(change: (project: Record<string, unknown>) => object): Buffer {
    const members = unzipSync(projectFile)
    const project = JSON.parse(Buffer.from(members['project.json']).toString()) as Record<string, unknown>
    return Buffer.from(zipSync({ ...members, 'project.json': strToU8(JSON.stringify(change(project))) }))
  }
})

/** A PNG whose header says 0 x 0; the checksum of the header is right, so only its figures are wrong. */
function pngOfNothing(): Buffer {
  const header = Buffer.from('49484452000000000000000008020000', 'hex')
  const body = Buffer.concat([header, Buffer.from([0])])
  const check = Buffer.alloc(4)
  check.writeUInt32BE(crc32(body))
  const end = Buffer.from('0000000049454e44ae426082', 'hex')
  return Buffer.concat([Buffer.from('89504e470d0a1a0a0000000d', 'hex'), body, check, end])
}
