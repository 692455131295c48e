import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { createServer } from 'vite'

const root = fileURLToPath(new URL('../..', import.meta.url))

/** Serves the project's folder with its TypeScript as a browser reads it; `url` ends with a slash. */
export async function serveSource(): Promise<{ url: string; close: () => Promise<void> }> {
  // A cache of its own: two servers at work on one cache tell each other's pages that they are outdated.
  const cacheDir = mkdtempSync(join(tmpdir(), 'winterclay-vite-'))
  const server = await createServer({
    root,
    configFile: `${root}vite.config.ts`,
    logLevel: 'error',
    cacheDir,
    server: { port: 0, watch: null, hmr: false },
    optimizeDeps: { noDiscovery: true },
  })
  await server.listen()
  return {
    url: server.resolvedUrls!.local[0],
    async close() {
      await server.close()
      rmSync(cacheDir, { recursive: true, force: true })
    },
  }
}
