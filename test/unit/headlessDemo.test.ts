import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { resolve } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import type { Truth } from '../../sample-images/truth.ts'
import { readCsv } from '../../worker/core/csv.ts'
import { inProcess, scratchFolder, winterclay } from '../fixtures/headless.ts'
import { scoreBoundaries } from '../fixtures/scoreLadder.ts'

const { path } = scratchFolder()
const sample = (name: string) => fileURLToPath(new URL(`../../sample-images/${name}`, import.meta.url))
const truth = JSON.parse(readFileSync(sample('truth/askelmere-1.json'), 'utf8')) as Truth

interface Summary {
  layers: number
  expected_years: number
  years_95: [number, number]
  mm_per_px: number | null
}

function results(name: string): { summary: Summary; boundaries: number[]; kinds: string[] } {
  const { header, rows } = readCsv(readFileSync(path(name, 'layers.csv'), 'utf8'), name)
  const kinds = rows.map((row) => row[header.indexOf('kind')])
  const boundaries = rows
    .filter((_, i) => kinds[i] !== 'event')
    .map((row) => Number(row[header.indexOf('boundary_px')]))
  return { summary: JSON.parse(readFileSync(path(name, 'summary.json'), 'utf8')) as Summary, boundaries, kinds }
}

describe('the demo, counted without a hint', () => {
  it('agrees with its truth: F1 at least 0.97, the expected count within 3 %', async () => {
    const { status, stderr } = await winterclay('count', sample('scans/askelmere-1.jpg'), '--out', path('demo'))
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' })
    const { summary, boundaries } = results('demo')
    const { f1, missed, spurious } = scoreBoundaries(truth.boundaries, boundaries)
    expect(f1, `missed ${missed.join(', ')}; spurious ${spurious.join(', ')}`).toBeGreaterThanOrEqual(0.97)
    expect(summary.layers).toBe(boundaries.length)
    const years = truth.boundaries.length
    expect(Math.abs(summary.expected_years - years) / years).toBeLessThan(0.03)
    expect(summary.mm_per_px).toBe(0.05)
  })
  it('gives the same bytes again', async () => {
    await winterclay('count', sample('scans/askelmere-1.jpg'), '--out', path('again'))
    for (const file of ['layers.csv', 'profile.csv', 'summary.json']) {
      expect(readFileSync(path('again', file), 'utf8')).toBe(readFileSync(path('demo', file), 'utf8'))
    }
  })
  it('finds the same years in the 16-bit radiograph as in the photograph', async () => {
    await inProcess('count', sample('scans/askelmere-1-radiograph.tif'), '--out', path('radiograph'))
    const { summary, boundaries } = results('radiograph')
    const inside = truth.boundaries.filter((at) => at > 3000 && at < 7000).map((at) => (at - 3000) / 2)
    expect(scoreBoundaries(inside, boundaries).f1).toBeGreaterThan(0.9)
    expect(summary.mm_per_px).toBeCloseTo(0.1, 9)
  })
})

const reference = resolve(process.env.WINTERCLAY_REFERENCE ?? '../shared/reference', 'scans')
const scans = existsSync(reference) ? readdirSync(reference).filter((name) => name.endsWith('.tif')) : []

describe.skipIf(scans.length === 0)('real scans (skipped: no reference data)', () => {
  it('are counted from a folder, photographs and radiographs alike, with layers in order inside the path', async () => {
    const { status, stderr } = await inProcess('count', reference, '--out', path('real'))
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' })
    for (const name of scans) {
      const { summary, boundaries } = results(`real/${name}`)
      expect(summary.layers).toBeGreaterThan(0)
      expect(summary.years_95[0]).toBeLessThanOrEqual(summary.expected_years)
      expect(summary.years_95[1]).toBeGreaterThanOrEqual(summary.expected_years)
      for (let i = 1; i < boundaries.length; i++) expect(boundaries[i]).toBeGreaterThan(boundaries[i - 1])
    }
  })
})
