import { readFileSync, readdirSync } from 'node:fs'
import { dirname, join, relative, resolve, sep } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'

const root = resolve(dirname(fileURLToPath(import.meta.url)), '..')

interface Import {
  from: string
  /** A file of the project (relative path) or the name of a package. */
  target: string
  typeOnly: boolean
}

function sourcesIn(folder: string): string[] {
  return readdirSync(join(root, folder), { recursive: true, encoding: 'utf8' })
    .filter((name) => /\.(ts|svelte)$/.test(name))
    .map((name) => join(folder, name).split(sep).join('/'))
}

function importsOf(file: string): Import[] {
  const text = readFileSync(join(root, file), 'utf8')
  const found: Import[] = []
  const statement =
    /(?:^|\n)\s*(import|export)\s+(type\s+)?(?:[^'"();]*?\sfrom\s+)?['"]([^'"]+)['"]|import\(\s*['"]([^'"]+)['"]\s*\)/g
  for (const match of text.matchAll(statement)) {
    const [, , type, from, dynamic] = match as unknown as (string | undefined)[]
    const specifier = from ?? dynamic ?? ''
    const target = specifier.startsWith('.')
      ? relative(root, resolve(root, dirname(file), specifier))
          .split(sep)
          .join('/')
      : specifier.replace(/^((?:@[^/]+\/)?[^/]+).*/, '$1')
    found.push({ from: file, target, typeOnly: type !== undefined })
  }
  return found
}

const imports = [...sourcesIn('src'), ...sourcesIn('worker')].flatMap(importsOf)
const lines = (breaches: Import[]) => breaches.map(({ from, target }) => `${from} -> ${target}`)

/** Folder or file -> what it may import, besides itself. `(types)` marks a prefix that may be imported for its types only. */
const allowed: Record<string, string[]> = {
  'src/document/': ['worker/units.ts', 'worker/check.ts', 'worker/core/ (types)', 'worker/reading/ (types)'],
  'src/commands/': [
    'src/document/',
    'worker/units.ts',
    'worker/check.ts',
    'worker/core/transect.ts',
    'worker/core/ (types)',
    'worker/reading/ (types)',
  ],
  'src/view/': [
    'src/document/ (types)',
    'worker/units.ts',
    'worker/core/transect.ts',
    'worker/core/ (types)',
    'worker/reading/ (types)',
    'worker/protocol.ts (types)',
    'd3-scale',
  ],
  'src/session/': [
    'src/document/',
    'src/commands/',
    'worker/protocol.ts',
    'worker/units.ts',
    'worker/check.ts',
    'worker/work.ts (types)',
    'worker/core/transect.ts',
    'worker/core/ (types)',
    'worker/reading/ (types)',
    'svelte',
    'idb',
    'fflate',
  ],
  'src/components/': [
    'src/session/',
    'src/commands/',
    'src/view/',
    'src/document/',
    'worker/units.ts',
    'worker/check.ts',
    'worker/core/transect.ts',
    'worker/core/ (types)',
    'worker/protocol.ts (types)',
    'worker/reading/ (types)',
    'svelte',
  ],
  'src/headless/': [
    'src/document/',
    'src/commands/',
    'src/session/projectFile.ts',
    'src/view/',
    'worker/',
    'sharp',
    'node:',
  ],
  'worker/core/': [
    'worker/units.ts',
    'worker/check.ts',
    'worker/random.ts',
    'worker/work.ts',
    'ndarray',
    'ndarray-fft',
    'cwise-compiler',
  ],
  'worker/reading/': ['worker/units.ts', 'worker/check.ts', 'worker/work.ts', 'worker/core/scan.ts'],
}

function isAllowed({ from, target, typeOnly }: Import, folder: string): boolean {
  if (target.startsWith(folder) || target.endsWith('.css')) return true
  return allowed[folder].some((rule) => {
    const prefix = rule.replace(' (types)', '')
    const fits =
      target === prefix || (/[/:]$/.test(prefix) && target.startsWith(prefix)) || target.startsWith(`${prefix}/`)
    return fits && (typeOnly || !rule.endsWith('(types)')) && from !== ''
  })
}

describe('the arrows of the house', () => {
  it('reads the imports of a good number of files, so that the checks below mean something', () => {
    expect(imports.length).toBeGreaterThan(50)
  })

  for (const folder of Object.keys(allowed)) {
    it(`${folder} imports only what it may`, () => {
      const breaches = imports.filter((one) => one.from.startsWith(folder) && !isAllowed(one, folder))
      expect(lines(breaches)).toEqual([])
    })
  }

  it('the worker imports nothing of the page', () => {
    expect(
      lines(imports.filter(({ from, target }) => from.startsWith('worker/') && target.startsWith('src/'))),
    ).toEqual([])
  })

  it('sharp stands in the headless command only', () => {
    const users = imports.filter(({ from, target }) => target === 'sharp' && !from.startsWith('src/headless/'))
    expect(lines(users)).toEqual([])
  })

  it('worker.ts is imported by no file: it alone knows that it is a worker', () => {
    expect(lines(imports.filter(({ target }) => target === 'worker/worker.ts'))).toEqual([])
  })

  it('core files import no file that comes later in the order of the job', () => {
    const graph = new Map<string, string[]>()
    for (const { from, target } of imports) {
      if (from.startsWith('worker/core/') && target.startsWith('worker/core/'))
        graph.set(from, [...(graph.get(from) ?? []), target])
    }
    const visit = (file: string, path: string[]): void => {
      if (path.includes(file)) throw new Error(`a circle of imports: ${[...path, file].join(' -> ')}`)
      for (const next of graph.get(file) ?? []) visit(next, [...path, file])
    }
    for (const file of graph.keys()) expect(() => visit(file, [])).not.toThrow()
    const order = [
      'scan',
      'transect',
      'profile',
      'detrend',
      'candidates',
      'ladder',
      'counts',
      'chronology',
      'splice',
      'curve',
      'dates',
      'lattice',
      'rates',
      'tables',
    ]
    const place = (file: string) => order.indexOf(file.replace(/^worker\/core\/(.*)\.ts$/, '$1'))
    const backwards = imports.filter(({ from, target }) => place(from) >= 0 && place(target) > place(from))
    expect(lines(backwards)).toEqual([])
  })

  it('the core and the document know no page, no clock, no chance and no promise', () => {
    const forbidden =
      /\b(Math\.random|Date\.now|new Date\(|performance\.now|setTimeout|window\.(?:document|location|navigator|setTimeout|addEventListener|localStorage)|globalThis\.|navigator\.|async |await |new Promise)/
    const breaches = [...sourcesIn('worker/core'), ...sourcesIn('src/document'), ...sourcesIn('src/commands')].filter(
      (file) => {
        const code = readFileSync(join(root, file), 'utf8').replace(/\/\*[\s\S]*?\*\/|\/\/.*$/gm, '')
        return forbidden.test(code)
      },
    )
    expect(breaches).toEqual([])
  })
})
