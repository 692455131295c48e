import { chmodSync } from 'node:fs'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { svelte } from '@sveltejs/vite-plugin-svelte'
import type { Plugin } from 'vite'
import { VitePWA } from 'vite-plugin-pwa'
import { defineConfig } from 'vitest/config'

const at = (path: string) => fileURLToPath(new URL(path, import.meta.url))

/** npx runs the command itself, so the built file must be executable; bundlers write it without that bit. */
const executableCommand: Plugin = {
  name: 'executable-command',
  writeBundle({ dir }, bundle) {
    for (const file of Object.values(bundle)) {
      if (dir && file.type === 'chunk' && file.isEntry) chmodSync(join(dir, file.fileName), 0o755)
    }
  },
}

/**
 * One configuration for the page, its worker, the headless command and the tests.
 * `vite build` makes the page in dist/page; `vite build --ssr headless/main.ts` the command in dist/headless.
 */
export default defineConfig(({ isSsrBuild }) => ({
  root: at('./src'),
  publicDir: isSsrBuild ? false : at('./sample-images/scans'),
  base: './',
  plugins: [
    svelte({ configFile: false }),
    // The page works offline after its first visit: page, worker and the demo's photograph are kept.
    isSsrBuild
      ? [executableCommand]
      : VitePWA({
          registerType: 'autoUpdate',
          injectRegister: 'script-defer',
          manifest: {
            name: 'Winterclay',
            short_name: 'Winterclay',
            description: 'Date lake sediment by counting its annual layers.',
            display: 'standalone',
            start_url: './',
            background_color: '#fbfbfb',
            theme_color: '#fbfbfb',
            icons: [],
          },
          workbox: { globPatterns: ['**/*.{html,js,css,json,jpg}'], maximumFileSizeToCacheInBytes: 4e6 },
        }),
  ],
  // ndarray-fft was written for Node: it names `global` and reaches for Node's `buffer` through its pool of arrays.
  define: isSsrBuild ? {} : { global: 'globalThis' },
  resolve: { alias: isSsrBuild ? {} : { buffer: at('./worker/buffer.ts') } },
  optimizeDeps: { include: ['ndarray', 'ndarray-fft'] },
  worker: { format: 'es' },
  server: { fs: { allow: [at('.')] } },
  build: {
    outDir: at(isSsrBuild ? './dist/headless' : './dist/page'),
    emptyOutDir: true,
    target: 'es2022',
    ...(isSsrBuild ? { ssr: true } : {}),
  },
  preview: { port: 4173 },
  test: {
    root: at('.'),
    include: ['test/**/*.test.ts'],
    exclude: ['**/node_modules/**', 'dist/**'],
    environment: 'node',
    testTimeout: 30_000,
    hookTimeout: 60_000,
    maxWorkers: 2,
    fileParallelism: true,
  },
}))
