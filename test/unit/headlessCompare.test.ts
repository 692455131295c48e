import { readFileSync, writeFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import type { CounterMarks } from '../../worker/core/counterMarks.ts'
import { readCsv } from '../../worker/core/tables.ts'
import { inProcess, refused, scratchFolder } from '../fixtures/headless.ts'
import { simulateCore, usualCores } from '../fixtures/simulatedCounts.ts'

const scratch = scratchFolder()
const core = simulateCore(21, { ...usualCores, years: [400, 400] })

function write(name: string, text: string): string {
  writeFileSync(scratch.path(name), text)
  return scratch.path(name)
}
function countFile(name: string, { position, doubtful }: Pick<CounterMarks, 'position' | 'doubtful'>): string {
  const rows = Array.from(position, (depth, i) => `${depth.toFixed(5)},${doubtful[i] ? 'doubtful' : 'certain'}`)
  return write(name, `depth_mm,mark\n${rows.join('\n')}\n`)
}
const plain = (depths: (number | string)[], mark = 'certain') =>
  `depth_mm,mark\n${depths.map((depth) => `${depth},${mark}`).join('\n')}\n`

describe('winterclay compare', () => {
  it('writes sites.csv and agreement.json with the figures of every convention', async () => {
    const files = core.counts.map((count, k) => countFile(`${'ABC'[k]}.csv`, count))
    const { status, stderr } = await inProcess(
      'compare',
      ...files,
      '--out',
      scratch.path('out'),
      '--horizons',
      '100, 200',
    )
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' })
    const sites = readCsv(readFileSync(scratch.path('out', 'sites.csv'), 'utf8'), 'sites.csv')
    expect(sites.header).toEqual(['site', 'depth_mm', 'A', 'B', 'C', 'probability'])
    for (const [k, { position, doubtful }] of core.counts.entries()) {
      const labels = sites.rows.map((row) => row[2 + k])
      const inDoubt = doubtful.reduce((sum, one) => sum + one, 0)
      expect(labels.filter((label) => label === 'doubtful').length).toBe(inDoubt)
      expect(labels.filter((label) => label === 'certain').length).toBe(position.length - inDoubt)
    }
    const agreement = JSON.parse(readFileSync(scratch.path('out', 'agreement.json'), 'utf8')) as Record<string, unknown>
    const keys = [
      'totals',
      'mean',
      'sd',
      'rms',
      'percent_error',
      'half_range',
      'half_layer',
      'kappa',
      'chapman',
      'latent',
    ]
    for (const key of keys) expect(agreement[key], key).not.toBeUndefined()
    const latent = agreement.latent as {
      counters: Record<string, { missed: number; false: number }>
      expected_years: number
      years_95: [number, number]
      missed_by_all: number
      systematic: { sd: number; years_95: [number, number] }
    }
    expect(Object.keys(latent.counters)).toEqual(['A', 'B', 'C'])
    expect(latent.years_95[0]).toBeLessThanOrEqual(core.years)
    expect(latent.years_95[1]).toBeGreaterThanOrEqual(core.years)
    expect(latent.systematic.sd).toBe(0.02)
    const probabilities = sites.rows.reduce((sum, row) => sum + Number(row[5]), 0)
    expect(probabilities + latent.missed_by_all).toBeCloseTo(latent.expected_years, 0)
    const intervals = readCsv(readFileSync(scratch.path('out', 'intervals.csv'), 'utf8'), 'intervals.csv')
    expect(intervals.rows.map(([from, to]) => [from, to])).toEqual([
      ['', '100.0000'],
      ['100.0000', '200.0000'],
      ['200.0000', ''],
      ['', '100.0000'],
      ['', '200.0000'],
      ['', ''],
    ])
  })

  it('gives the same bytes for the same counts, whatever their order', async () => {
    const files = core.counts.map((count, k) => countFile(`${'ABC'[k]}.csv`, count))
    const first = await inProcess('compare', ...files, '--json')
    expect((await inProcess('compare', ...files, '--json')).stdout).toBe(first.stdout)
    const { totals, sites } = JSON.parse(first.stdout) as { totals: Record<string, number>; sites: number }
    const turned = JSON.parse(
      (await inProcess('compare', ...files.toReversed(), '--json')).stdout,
    ) as typeof JSON.parse & {
      totals: Record<string, number>
      sites: number
    }
    expect(turned.totals).toEqual(totals)
    expect(turned.sites).toBe(sites)
  })

  it('prints the published figures of repeat counts and of doubtful layers', async () => {
    const layers = (n: number) => Array.from({ length: n }, (_, i) => i + 1)
    const files = [1012, 1025, 998, 1020, 1005].map((n, k) => write(`count${k}.csv`, plain(layers(n))))
    const { stdout } = await inProcess('compare', ...files, '--json')
    const found = JSON.parse(stdout) as Record<string, number>
    expect([found.mean, found.sd, found.rms, found.percent_error, found.half_range]).toEqual([
      1012, 10.931606, 9.777525, 1.080198, 13.5,
    ])
    const doubts = write(
      'doubts.csv',
      plain(layers(1000)) +
        layers(60)
          .map((i) => `${1000 + i},doubtful`)
          .join('\n'),
    )
    const one = JSON.parse((await inProcess('compare', doubts, '--json')).stdout) as {
      half_layer: Record<string, number>
      latent: null
      sd: null
    }
    expect(one.half_layer).toMatchObject({ years: 1030, mce: 30, sigma: 15, independent_sd: 3.872983 })
    expect([one.latent, one.sd]).toEqual([null, null])
  })

  it('calls two files of the same name apart', async () => {
    const file = write('A.csv', plain([1, 2, 3, 4, 5, 6]))
    const { stdout } = await inProcess('compare', file, file, '--json')
    expect((JSON.parse(stdout) as { totals: object }).totals).toEqual({ A: 6, 'A (2)': 6 })
  })

  it('refuses 100,000 rows with NaN, duplicates and reversed depths in one line: the first and how many more', async () => {
    const depths: (number | string)[] = Array.from({ length: 100_000 }, (_, i) => (i * 0.8).toFixed(1))
    depths[500] = 'NaN'
    depths[70_000] = depths[69_999]
    depths[90_000] = 3
    const good = write('good.csv', plain([1, 2, 3]))
    const big = write('big.csv', plain(depths))
    const message = 'row 502: depth_mm must be a finite number; it is "NaN"; 2 more rows are wrong'
    expect(await refused('compare', good, big, '--out', scratch.path('none'))).toBe(
      `winterclay compare: ${big}, ${message}`,
    )
  })

  it('refuses other bad tables, each in one line that says what and where', async () => {
    const good = write('good.csv', plain([1, 2, 3]))
    const refusal = async (text: string) =>
      (await refused('compare', good, write('bad.csv', text), '--json')).replace(/^.*bad\.csv/, 'bad.csv')
    expect(await refusal(plain([1, 2, 2]))).toBe(
      'bad.csv, row 4: depth_mm 2 is given twice, as in row 3; remove one of them',
    )
    expect(await refusal(plain([1, 3, 2]))).toBe(
      'bad.csv, row 4: depth_mm 2 lies above 3 in row 3; rows must run downcore',
    )
    expect(await refusal(plain([1, '', 2]))).toBe('bad.csv, row 3: depth_mm is empty')
    expect(await refusal(plain([1, 2], 'perhaps'))).toBe(
      'bad.csv, row 2: mark must be certain or doubtful; it is "perhaps"; 1 more row is wrong',
    )
    expect(await refusal('depth_mm,mark\n')).toContain('has no rows below its header')
    expect(await refusal('depth,mark\n1,certain\n')).toContain('has no column depth_mm')
    expect(await refusal('')).toContain('is empty')
  })

  it('refuses bad arguments', async () => {
    const good = write('good.csv', plain([1, 2, 3]))
    expect(await refused('compare', '--json')).toContain('COUNT.csv is missing')
    expect(await refused('compare', good)).toContain('give --out DIR for files, --json for standard output, or both')
    expect(await refused('compare', good, '--json', '--tolerance', '0')).toContain(
      '--tolerance must be a number greater than 0; it is 0',
    )
    expect(await refused('compare', good, '--json', '--bias-sd', '2')).toContain(
      '--bias-sd must be between 0 and 1; it is 2',
    )
    expect(await refused('compare', good, '--json', '--horizons', '10 deep')).toContain(
      'number 2 of --horizons must be a number; it is "deep"',
    )
    expect(await refused('compare', good, '--json', '--seed', '1.5')).toContain(
      '--seed must be a whole number from 0; it is 1.5',
    )
    expect(await refused('compare', scratch.path('missing.csv'), '--json')).toContain('it does not exist')
  })
})
