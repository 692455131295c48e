import { createHash } from 'node:crypto'
import { mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs'
import { beforeAll, describe, expect, it } from 'vitest'
import { readCsv } from '../../worker/core/csv.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import {
  inProcess,
  refused,
  scratchFolder,
  stripes,
  stripesPng,
  stripesWebp,
  winterclay,
} from '../fixtures/headless.ts'
import { scoreBoundaries } from '../fixtures/scoreLadder.ts'

const { path } = scratchFolder()
const length = 900
const { tops } = stripes(length, 1)

const text = (...names: string[]) => readFileSync(path(...names), 'utf8')
const json = (...names: string[]) => JSON.parse(text(...names)) as Record<string, unknown>
const columns = (...names: string[]) => {
  const { header, rows } = readCsv(text(...names), names.join('/'))
  return { header, of: (name: string) => rows.map((row) => row[header.indexOf(name)]), rows }
}

beforeAll(async () => {
  writeFileSync(path('stripes.png'), await stripesPng(length, 1))
  writeFileSync(path('unscaled.webp'), await stripesWebp(length, 1))
  writeFileSync(path('upright.webp'), await stripesWebp(length, 1, 90))
})

describe('count', () => {
  it('writes layers, profile and summary', async () => {
    const run = await inProcess('count', path('stripes.png'), '--out', path('made', 'on the way'))
    expect(run).toMatchObject({ status: 0, stderr: '' })
    expect(run.stdout).toContain('stripes.png: ')
    expect(readdirSync(path('made', 'on the way')).sort()).toEqual(['layers.csv', 'profile.csv', 'summary.json'])
    const layers = columns('made', 'on the way', 'layers.csv')
    expect(layers.header).toEqual(['layer', 'boundary_px', 'depth_mm', 'thickness_mm', 'probability', 'kind'])
    const found = layers.of('boundary_px').map(Number)
    expect(scoreBoundaries(tops, found).f1).toBeGreaterThan(0.97)
    layers.rows.forEach(([layer, px, mm], i) => {
      expect(Number(layer)).toBe(i + 1)
      expect(Number(mm)).toBeCloseTo(Number(px) * 0.05, 3)
    })
    const thickness = layers.of('thickness_mm')
    expect(Number(thickness[0])).toBeCloseTo((found[1] - found[0]) * 0.05, 3)
    expect(thickness.at(-1)).toBe('')
    const profile = columns('made', 'on the way', 'profile.csv')
    expect(profile.header).toEqual(['distance_px', 'depth_mm', 'intensity', 'detrended'])
    expect(profile.rows).toHaveLength(length)
    expect(profile.rows[0][0]).toBe('0.5')
  })

  it('says in the summary what was found, where, by which parameters', async () => {
    await inProcess('count', path('stripes.png'), '--out', path('summary'))
    const summary = json('summary', 'summary.json')
    const rows = columns('summary', 'layers.csv').rows.length
    expect(summary).toMatchObject({
      scan: 'stripes.png',
      layers: rows,
      mm_per_px: 0.05,
      mm_per_px_basis: 'file',
      path: [
        [0, 30],
        [length, 30],
      ],
      path_px: length,
      band_px: 40,
      recipe: defaultRecipe,
      scan_sha256: createHash('sha256')
        .update(readFileSync(path('stripes.png')))
        .digest('hex'),
    })
    const [low, high] = summary.years_95 as number[]
    expect(low).toBeLessThanOrEqual(tops.length)
    expect(high).toBeGreaterThanOrEqual(tops.length)
    expect(Math.abs((summary.expected_years as number) - tops.length)).toBeLessThan(1.5)
  })

  it('gives the same bytes for the same scan and recipe', async () => {
    const first = await winterclay('count', path('stripes.png'), '--out', path('once'))
    const second = await winterclay('count', path('stripes.png'), '--out', path('twice'))
    expect(second).toEqual(first)
    for (const name of readdirSync(path('once'))) expect(text('twice', name)).toBe(text('once', name))
  })

  it('prints the summary as JSON, alone or beside the files', async () => {
    const { stdout } = await inProcess('count', path('stripes.png'), '--json')
    await inProcess('count', path('stripes.png'), '--out', path('beside'))
    expect(stdout).toBe(text('beside', 'summary.json'))
  })

  it('takes a given scale before that of the file, and leaves depths empty when there is none', async () => {
    await inProcess('count', path('stripes.png'), '--mm-per-px', '0.1', '--out', path('given'))
    expect(json('given', 'summary.json')).toMatchObject({ mm_per_px: 0.1, mm_per_px_basis: 'given' })
    await inProcess('count', path('unscaled.webp'), '--out', path('none'))
    expect(json('none', 'summary.json')).toMatchObject({ mm_per_px: null, mm_per_px_basis: 'none' })
    expect(new Set(columns('none', 'layers.csv').of('depth_mm'))).toEqual(new Set(['']))
    expect(new Set(columns('none', 'profile.csv').of('depth_mm'))).toEqual(new Set(['']))
  })

  it('follows the longer axis, whichever way the scan lies, and a path that says the same', async () => {
    await inProcess('count', path('unscaled.webp'), '--out', path('lying'))
    await inProcess('count', path('upright.webp'), '--out', path('standing'))
    expect(text('standing', 'layers.csv')).toBe(text('lying', 'layers.csv'))
    await inProcess('count', path('unscaled.webp'), '--path', `0,30 ${length},30`, '--out', path('by path'))
    expect(text('by path', 'layers.csv')).toBe(text('lying', 'layers.csv'))
  })

  it('begins where the young end is said to be', async () => {
    await inProcess('profile', path('unscaled.webp'), '--out', path('left'))
    await inProcess('profile', path('unscaled.webp'), '--orientation', 'young-right', '--out', path('right'))
    const left = columns('left', 'profile.csv').of('intensity')
    expect(columns('right', 'profile.csv').of('intensity').reverse()).toEqual(left)
  })

  it('sets event beds apart', async () => {
    writeFileSync(path('spans.csv'), 'kind,from_px,to_px\nevent,200,300\n')
    await inProcess('count', path('stripes.png'), '--spans', path('spans.csv'), '--out', path('bed'))
    const layers = columns('bed', 'layers.csv')
    const bed = layers.rows.filter((row) => row[5] === 'event')
    expect(bed.map((row) => row.slice(1))).toEqual([['200.00', '10.0000', '5.0000', '1.000000', 'event']])
    const inside = layers
      .of('boundary_px')
      .map(Number)
      .filter((px) => px > 200 && px < 300)
    expect(inside).toEqual([])
    expect(json('bed', 'summary.json')).toMatchObject({ events: 1, layers: layers.rows.length - 1 })
  })

  it('takes from a recipe what it says and the rest from the defaults', async () => {
    writeFileSync(path('recipe.json'), '{"candidates": {"prominence": 0.8}}')
    await inProcess('count', path('stripes.png'), '--recipe', path('recipe.json'), '--out', path('cooked'))
    expect(json('cooked', 'summary.json').recipe).toEqual({
      ...defaultRecipe,
      candidates: { ...defaultRecipe.candidates, prominence: 0.8 },
    })
  })
})

describe('a folder of scans', () => {
  it('is counted scan by scan; one that fails is reported and the others are done', async () => {
    mkdirSync(path('folder', 'deeper'), { recursive: true })
    writeFileSync(path('folder', 'b.png'), readFileSync(path('stripes.png')))
    writeFileSync(path('folder', 'a.PNG'), await stripesPng(400, 2))
    writeFileSync(path('folder', 'broken.tif'), 'no scan at all')
    writeFileSync(path('folder', 'notes.txt'), 'left alone')
    const run = await inProcess('count', path('folder'), '--out', path('many'))
    expect(run.status).toBe(2)
    expect(run.stderr).toMatch(/^winterclay count: 1 of 3 scans failed: broken\.tif is not a picture[^\n]+\n$/)
    expect(run.stdout).toContain('2 of 3 scans done')
    expect(readdirSync(path('many')).sort()).toEqual(['a.PNG', 'b.png', 'summary.json'])
    const { scans, done, failed } = json('many', 'summary.json') as {
      scans: { scan: string }[]
      done: number
      failed: number
    }
    expect({ done, failed }).toEqual({ done: 2, failed: 1 })
    expect(scans.map(({ scan }) => scan)).toEqual(['a.PNG', 'b.png', 'broken.tif'])
    expect(scans[2]).toHaveProperty('error.message')
    await inProcess('count', path('stripes.png'), '--out', path('alone'))
    expect(text('many', 'b.png', 'layers.csv')).toBe(text('alone', 'layers.csv'))
  })
  it('without scans is refused', async () => {
    mkdirSync(path('empty'))
    expect(await refused('count', path('empty'), '--out', path('x'))).toContain('empty holds no scans')
  })
})

describe('profile', () => {
  it('writes the profile and a summary', async () => {
    const { status } = await inProcess('profile', path('stripes.png'), '--out', path('profile'))
    expect(status).toBe(0)
    expect(readdirSync(path('profile')).sort()).toEqual(['profile.csv', 'summary.json'])
    await inProcess('count', path('stripes.png'), '--out', path('with count'))
    expect(text('profile', 'profile.csv')).toBe(text('with count', 'profile.csv'))
  })
})
