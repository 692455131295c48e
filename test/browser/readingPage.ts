import { mkdtempSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import type { Browser, Page } from 'playwright-core'
import { createServer } from 'vite'
import type { ViteDevServer } from 'vite'
import { launchChromium } from './chromium.ts'

const root = fileURLToPath(new URL('../..', import.meta.url))

/** The test runner rewrites `import()` in what it sends to the page; `load` is the page's own. */
const blank = `<!doctype html><title>blank</title><input type="file" id="files" multiple>
<script>globalThis.load = (address) => import(address)</script>`

/** What a page of `openSourcePage` offers to functions evaluated in it: `(globalThis as unknown as Loading<Module>).load`. */
export interface Loading<Module> {
  load: (address: string) => Promise<Module>
}

/** A blank page in a real Chromium that can import the project's source files, and pick files from disk. */
export interface SourcePage {
  page: Page
  /** Address under which the page imports a source file, by its path in the project. */
  address: (path: string) => string
  /** Puts files into the page's file input `#files`. */
  pick: (paths: string[]) => Promise<void>
  close: () => Promise<void>
}

export async function openSourcePage(extraArguments: string[] = []): Promise<SourcePage> {
  const server: ViteDevServer = await createServer({
    root,
    configFile: `${root}vite.config.ts`,
    logLevel: 'error',
    // A cache of its own: two servers at work on one cache tell each other's pages that they are outdated.
    cacheDir: mkdtempSync(join(tmpdir(), 'winterclay-vite-')),
    server: { port: 0, watch: null, hmr: false },
    optimizeDeps: { noDiscovery: true },
  })
  await server.listen()
  const url = server.resolvedUrls!.local[0]
  const browser: Browser = await launchChromium(extraArguments)
  const page = await browser.newPage()
  await page.route('**/blank.html', (route) =>
    route.fulfill({
      contentType: 'text/html',
      body: blank,
    }),
  )
  await page.goto(`${url}blank.html`)
  return {
    page,
    address: (path) => `${url}@fs/${root.replace(/^\//, '')}${path}`,
    pick: (paths) => page.setInputFiles('#files', paths),
    close: async () => {
      await browser.close()
      await server.close()
    },
  }
}
