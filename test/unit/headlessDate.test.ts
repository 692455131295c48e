import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { beforeAll, describe, expect, it } from 'vitest'
import { builtInCurve, yearlyCurve } from '../../worker/core/curve.ts'
import { readCsv } from '../../worker/core/csv.ts'
import { inProcess, refused, scratchFolder } from '../fixtures/headless.ts'

const { path } = scratchFolder()
const text = (...names: string[]) => readFileSync(path(...names), 'utf8')
const json = (...names: string[]) => JSON.parse(text(...names)) as Record<string, unknown>

const years = yearlyCurve(builtInCurve())
const n = 300
const header = 'id,kind,top_mm,base_mm,value,sigma,offset,offset_sigma\n'
/** True years fall by one a layer from 100 CE. */
const c14 = (id: string, layer: number) => `${id},c14,${layer}.2,${layer}.8,${years.age[1950 - 100 + layer]},25,0,0\n`
const good = header + c14('birch', 60) + c14('leaf', 180) + 'ash,year,250.5,250.5,-150,0,0,0\n'

beforeAll(() => {
  const rows = Array.from({ length: n }, (_, i) => `${i + 1},${i * 20},${i},1,1,varve\n`)
  writeFileSync(path('layers.csv'), `layer,boundary_px,depth_mm,thickness_mm,probability,kind\n${rows.join('')}`)
  writeFileSync(path('dates.csv'), good)
})

const run = (...more: string[]) =>
  inProcess('date', '--layers', path('layers.csv'), '--dates', path('dates.csv'), ...more)

describe('date', () => {
  it('writes ages, checks and a summary; astronomical years run through 1 BCE without a gap', async () => {
    const { status, stderr, stdout } = await run('--top-year', '100', '--bias-sd', '0', '--out', path('made'))
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' })
    expect(stdout).toContain('300 layers from 100 CE')
    const { header: columns, rows } = readCsv(text('made', 'ages.csv'), 'ages.csv')
    expect(columns.join(',')).toBe('layer,depth_mm,year_mean,year_sd,year_median,hpd68,hpd95')
    expect(rows[0].join(',')).toBe('1,0.0000,100.00,0.00,100,100..100,100..100')
    expect(rows.slice(99, 102).map((row) => row[4])).toEqual(['1', '0', '-1'])
    const checks = readCsv(text('made', 'date_checks.csv'), 'date_checks.csv')
    expect(checks.header.join(',')).toBe('id,year_median_with,year_median_without,residual_sigma,outlier_probability')
    expect(checks.rows.map(([id, withAll, without]) => [id, withAll, without])).toEqual([
      ['birch', '40', '40'],
      ['leaf', '-80', '-80'],
      ['ash', '-150', '-150'],
    ])
    expect(json('made', 'summary.json')).toMatchObject({
      layers: 300,
      top_year: 100,
      bias_sd: 0,
      missed_rate: 0,
      outliers: [],
    })
  })

  it('lets the count float and go below the year 0 with --top-year -50; the same call writes the same bytes', async () => {
    await run('--out', path('floating'))
    const [first] = readCsv(text('floating', 'ages.csv'), 'ages.csv').rows
    expect(Math.abs(Number(first[2]) - 100)).toBeLessThan(5)
    expect(first[6]).toMatch(/^-?\d+\.\.-?\d+(;-?\d+\.\.-?\d+)*$/)
    await run('--out', path('again'))
    for (const file of ['ages.csv', 'date_checks.csv', 'summary.json']) {
      expect(text('again', file)).toBe(text('floating', file))
    }
    writeFileSync(path('none.csv'), header)
    const bce = await inProcess(
      'date',
      '--layers',
      path('layers.csv'),
      '--dates',
      path('none.csv'),
      '--top-year',
      '-50',
      '--out',
      path('bce'),
    )
    expect(bce.status).toBe(0)
    expect(readCsv(text('bce', 'ages.csv'), 'ages.csv').rows[0][4]).toBe('-50')
  })

  it('takes the rate of missed years from the summary of the count beside the layers', async () => {
    mkdirSync(path('counted'))
    writeFileSync(path('counted', 'layers.csv'), text('layers.csv').replaceAll(',1,varve', ',0.9,varve'))
    writeFileSync(path('counted', 'summary.json'), JSON.stringify({ layers: n, expected_years: 300 }))
    const words = ['date', '--layers', path('counted', 'layers.csv'), '--top-year', '100', '--bias-sd', '0']
    await inProcess(...words, '--out', path('summed'))
    expect(json('summed', 'summary.json')).toMatchObject({
      missed_rate: 0.1,
      missed_rate_from: 'summary.json of the count',
    })
    await inProcess(...words, '--missed-rate', '0', '--out', path('option'))
    expect(json('option', 'summary.json')).toMatchObject({ missed_rate: 0, missed_rate_from: 'option' })
    const oldest = (folder: string) => Number(readCsv(text(folder, 'ages.csv'), 'ages.csv').rows[n - 1][2])
    expect(oldest('summed')).toBeCloseTo(100 - 299, 1)
    expect(oldest('option')).toBeCloseTo(100 - 0.9 * 299, 1)
  })

  it.each([
    ['a missing sigma', 'A,c14,1,2,2000,,0,0\n', 'line 2: sigma is missing'],
    ['a negative sigma', 'A,c14,1,2,2000,-5,0,0\n', 'line 2: sigma must not be negative; it is -5'],
    ['swapped depths', 'A,c14,9,2,2000,30,0,0\n', 'line 2: top_mm 9 lies below base_mm 2; are they swapped?'],
    [
      'a date outside the core',
      'A,c14,1,2,2000,30,0,0\nB,c14,400,401,2000,30,0,0\n',
      'line 3: the sample at 401 mm lies below the last layer, which ends at 300 mm',
    ],
    ['text in a number', 'A,c14,1,2,2000 BP,30,0,0\n', 'line 2: value must be a number; it is "2000 BP"'],
    ['a date beyond the curve', 'A,c14,1,2,70000,30,0,0\n', 'line 2: 70000 ± 30 14C a lies beyond the curve'],
    ['a post-bomb date without its curve', 'A,f14c,1,2,1.3,0.005,0,0\n', 'dates after 1950 need a post-bomb curve'],
  ])('refuses %s in one line that says where, and writes nothing', async (_, rows, message) => {
    writeFileSync(path('bad.csv'), header + rows)
    const line = await refused(
      'date',
      '--layers',
      path('layers.csv'),
      '--dates',
      path('bad.csv'),
      '--out',
      path('not made'),
    )
    expect(line).toContain(message)
    expect(line).toContain('bad.csv')
    expect(line).toContain('nothing was changed')
    expect(existsSync(path('not made'))).toBe(false)
  })

  it('refuses an unknown curve, bad options and missing files in words', async () => {
    writeFileSync(path('curve.csv'), `${header.trim()},curve\nA,c14,1,2,2000,30,0,0,marine\n`)
    expect(
      await refused('date', '--layers', path('layers.csv'), '--dates', path('curve.csv'), '--out', path('x')),
    ).toContain('line 2: there is no curve "marine"; the curves at hand are intcal20')
    const layers = ['date', '--layers', path('layers.csv')]
    expect(await refused('date', '--out', path('x'))).toContain('--layers FILE is missing')
    expect(await refused(...layers, '--out', path('x'))).toContain('nothing ties the count to the calendar')
    expect(await refused(...layers, '--top-year', '12.5', '--out', path('x'))).toContain(
      '--top-year must be a whole number',
    )
    expect(await refused(...layers, '--top-year', '5', '--bias-sd', '9', '--out', path('x'))).toContain(
      '--bias-sd must be between 0 and 0.5',
    )
    expect(await refused(...layers, '--top-year', '5', '--curve', path('none.14c'), '--out', path('x'))).toContain(
      'it does not exist',
    )
    expect(existsSync(path('x'))).toBe(false)
  })

  it('dates with a curve and a post-bomb curve of the user, and names both', async () => {
    const rows = Array.from({ length: 40 }, (_, i) => `${i * 60},${100 + i * 58},10`)
    writeFileSync(path('my.14c'), `# mine\n${rows.join('\n')}\n`)
    writeFileSync(path('bomb.csv'), 'cal_bp,F14C,sigma\n-60,1.05,.01\n-20,1.5,.01\n0,.98,.01\n')
    writeFileSync(path('young.csv'), `${header}A,f14c,20.5,20.5,1.2,0.01,0,0\nB,c14,250.5,250.5,290,25,0,0\n`)
    const words = [
      '--curve',
      path('my.14c'),
      '--post-bomb',
      path('bomb.csv'),
      '--top-year',
      '2010',
      '--out',
      path('young'),
    ]
    const { status } = await inProcess('date', '--layers', path('layers.csv'), '--dates', path('young.csv'), ...words)
    expect(status).toBe(0)
    const { curves } = json('young', 'summary.json') as { curves: { name: string; sha256: string; reduced: boolean }[] }
    expect(curves.map(({ name, reduced }) => [name, reduced])).toEqual([
      ['my.14c', false],
      ['bomb.csv', false],
    ])
    expect(curves[0].sha256).toMatch(/^[0-9a-f]{64}$/)
  })
})

describe('calibrate', () => {
  it('prints ranges, median and mean as JSON or in words', async () => {
    const { status, stdout } = await inProcess('calibrate', '4500', '30', '--json')
    expect(status).toBe(0)
    const result = JSON.parse(stdout) as Record<string, unknown>
    expect(result).toMatchObject({ median: 5162, cut_at: null })
    expect(result.hpd95).toEqual([[5045, 5300, 0.9541]])
    expect((result.hpd68 as number[][])[0]).toEqual([5053, 5143, 0.3802])
    expect((await inProcess('calibrate', '4500', '30')).stdout).toBe(
      '4500 ± 30 14C a, cal BP:\n68.3 %: 5053 to 5143 (38.0 %), 5158 to 5189 (13.6 %), 5219 to 5221 (1.1 %), 5234 to 5246 (5.0 %), 5261 to 5286 (10.7 %)\n95.4 %: 5045 to 5300 (95.4 %)\nmedian 5162, mean 5163.0\n',
    )
  })

  it('takes an offset, and writes the density where asked', async () => {
    const { stdout } = await inProcess(
      'calibrate',
      '5200',
      '40',
      '--offset',
      '400',
      '--offset-sigma',
      '50',
      '--json',
      '--out',
      path('one'),
    )
    expect(JSON.parse(stdout)).toMatchObject({ median: 5519, offset: 400, offset_sigma: 50 })
    const { header: columns, rows } = readCsv(text('one', 'calibration.csv'), 'calibration.csv')
    expect(columns).toEqual(['cal_bp', 'probability'])
    expect(rows.reduce((sum, row) => sum + Number(row[1]), 0)).toBeCloseTo(1, 4)
  })

  it('refuses what is no date', async () => {
    expect(await refused('calibrate', '4500')).toContain('SIGMA is missing')
    expect(await refused('calibrate', 'old', '30')).toContain('AGE must be a number; it is "old"')
    expect(await refused('calibrate', '4500', '0')).toContain('SIGMA must be a number greater than 0; it is 0')
    expect(await refused('calibrate', '90000', '30')).toContain('lies beyond the curve')
    expect(await refused('calibrate', '4500', '30', '--model', 'robust')).toContain(
      'model must be normal, student-t or mixture',
    )
  })
})
