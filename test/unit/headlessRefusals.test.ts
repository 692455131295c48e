import { mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { beforeAll, describe, expect, it } from 'vitest'
import { inProcess, refused, scratchFolder, stripesPng, winterclay } from '../fixtures/headless.ts'

const { path } = scratchFolder()

beforeAll(async () => {
  const png = await stripesPng(300, 3)
  writeFileSync(path('scan.png'), png)
  writeFileSync(path('empty.png'), '')
  writeFileSync(path('text.png'), 'this is a text')
  writeFileSync(path('cut.png'), png.subarray(0, png.length / 2))
  writeFileSync(path('file'), 'in the way')
  writeFileSync(path('bad.json'), '{')
  writeFileSync(path('list.json'), '[]')
  writeFileSync(path('unknown.json'), '{"ladder": {"steps": 3}}')
  writeFileSync(path('hostile.json'), '{"__proto__": {"x": 1}}')
  writeFileSync(path('nan.json'), '{"candidates": {"prominence": "NaN"}}')
  writeFileSync(path('columns.csv'), 'from,to,kind\n1,2,event\n')
  writeFileSync(path('kind.csv'), 'from_px,to_px,kind\n1,2,varve\n')
  writeFileSync(path('number.csv'), 'from_px,to_px,kind\n1,2,event\nNaN,9,event\n')
  writeFileSync(path('outside.csv'), 'from_px,to_px,kind\n1,2000,event\n')
  writeFileSync(path('latin.csv'), Buffer.from([0x66, 0xe9, 0x0a]))
})

describe('help', () => {
  it('lists the verbs and explains each', async () => {
    const general = await inProcess('--help')
    expect(general).toMatchObject({ status: 0, stderr: '' })
    for (const verb of ['profile', 'count']) {
      expect(general.stdout).toContain(`\n  ${verb}`)
      const own = await inProcess(verb, '--help')
      expect(own).toMatchObject({ status: 0, stderr: '' })
      expect(own.stdout).toContain(`npx winterclay ${verb} SCAN`)
    }
  })
})

describe('bad arguments are refused in one line', () => {
  it.each([
    [[], /^winterclay: which verb\? One of .*count/],
    [['cuont'], /^winterclay: there is no verb "cuont"/],
    [['constructor'], /^winterclay: there is no verb "constructor"/],
    [['count', '--out', 'OUT'], /^winterclay count: SCAN is missing$/],
    [['count', 'scan.png', 'scan.png', '--out', 'OUT'], /is one argument too many$/],
    [['count', 'scan.png'], /^winterclay count: give --out DIR for files, --json for standard output, or both$/],
    [['count', 'scan.png', '--out', ''], /--out needs a value/],
    [['count', 'scan.png', '--out', 'file'], /cannot write into the folder .*file: a file of that name is in the way/],
    [
      ['count', 'scan.png', '--out', 'file/below'],
      /cannot write into the folder .*: a file of that name is in the way/,
    ],
    [['count', 'scan.png', '--colour', 'red', '--out', 'OUT'], /Unknown option '--colour'/],
    [['count', 'scan.png', '--mm-per-px', 'NaN', '--out', 'OUT'], /--mm-per-px must be a number; it is "NaN"/],
    [
      ['count', 'scan.png', '--mm-per-px', '-1', '--out', 'OUT'],
      /--mm-per-px must be a number greater than 0; it is -1/,
    ],
    [['count', 'scan.png', '--mm-per-px', '0', '--out', 'OUT'], /--mm-per-px must be a number greater than 0; it is 0/],
    [['count', 'scan.png', '--band', '0', '--out', 'OUT'], /--band must be between 1 and/],
    [
      ['count', 'scan.png', '--band', '900', '--out', 'OUT'],
      /width must be between 1 pixel and the breadth of the scan/,
    ],
    [['count', 'scan.png', '--path', '5,5', '--out', 'OUT'], /--path must have at least two points/],
    [
      ['count', 'scan.png', '--path', '0,30 900,30', '--out', 'OUT'],
      /must lie on the scan of 300 x 60 pixels; it is at 900, 30/,
    ],
    [
      ['count', 'scan.png', '--path', '-1,30 20,30', '--out', 'OUT'],
      /must lie on the scan of 300 x 60 pixels; it is at -1, 30/,
    ],
    [['count', 'scan.png', '--path', '5,5 5,5', '--out', 'OUT'], /must span at least one pixel/],
    [
      ['count', 'scan.png', '--path', '0,1 9,1', '--orientation', 'young-up', '--out', 'OUT'],
      /leave --orientation out/,
    ],
    [['count', 'scan.png', '--orientation', 'left', '--out', 'OUT'], /--orientation must be one of young-left, /],
    [['profile', 'scan.png', '--spans', 'kind.csv', '--out', 'OUT'], /Unknown option '--spans'/],
  ])('%j', async (words, message) => {
    expect(await refused(...words.map(inFolder))).toMatch(message)
  })
})

describe('bad files are refused in one line', () => {
  it.each([
    [['nowhere.png'], /nowhere\.png: it does not exist$/],
    [['empty.png'], /empty/],
    [['text.png'], /text\.png/],
    [['cut.png'], /cut\.png/],
    [['scan.png', '--recipe', 'nowhere.json'], /cannot read .*nowhere\.json: it does not exist$/],
    [['scan.png', '--recipe', 'bad.json'], /bad\.json is not JSON: /],
    [
      ['scan.png', '--recipe', 'list.json'],
      /list\.json must hold an object with the groups profile, detrend, candidates, ladder$/,
    ],
    [['scan.png', '--recipe', 'unknown.json'], /unknown\.json: recipe\.ladder has an unknown key "steps"/],
    [['scan.png', '--recipe', 'hostile.json'], /hostile\.json: recipe has an unknown key "__proto__"/],
    [
      ['scan.png', '--recipe', 'nan.json'],
      /nan\.json: recipe\.candidates\.prominence must be a number from 0 to 1000000; it is "NaN"/,
    ],
    [['scan.png', '--spans', 'columns.csv'], /columns\.csv has no column from_px; its columns are from, to, kind$/],
    [
      ['scan.png', '--spans', 'kind.csv'],
      /kind\.csv, line 2: kind must be one of event, unreadable, hiatus; it is "varve"/,
    ],
    [['scan.png', '--spans', 'number.csv'], /number\.csv, line 3: from_px must be a number; it is "NaN"/],
    [['scan.png', '--spans', 'outside.csv'], /span 1 \(1 to 2000 px\) lies outside the profile/],
    [['scan.png', '--spans', 'latin.csv'], /latin\.csv is not UTF-8 text$/],
  ])('%j', async (words, message) => {
    expect(await refused('count', ...words.map(inFolder), '--out', path('OUT'))).toMatch(message)
  })
})

describe('names that would do harm', () => {
  it.each(['line\nend.png', '=1+1.png', 'esc\u001b[2Jape.png', '"quoted", name.png', '%s.png', "it's.png"])(
    'a scan called %j is counted, and its name breaks no line',
    async (name) => {
      mkdirSync(path('names'), { recursive: true })
      writeFileSync(path('names', name), readFileSync(path('scan.png')))
      const { status, stdout } = await inProcess('count', path('names', name), '--out', path('named'))
      expect(status).toBe(0)
      expect(stdout.split('\n')).toHaveLength(2)
      expect(stdout).not.toContain('\u001b')
      const summary = JSON.parse(readFileSync(path('named', 'summary.json'), 'utf8')) as { scan: string }
      expect(summary.scan).toBe(name)
    },
  )
  it('a missing scan with such a name is told in one line', async () => {
    expect(await refused('count', path('no\nsuch\u001b[2J.png'), '--json')).toContain('no such [2J.png')
  })
  it('a scan whose name begins with a dash is named after --', async () => {
    expect(await refused('count', '--json', '--', '-x.png')).toContain('cannot open -x.png: it does not exist')
  })
})

describe('the exit status of the process', () => {
  it('is 0 when done and 2 when refused, with one line on standard error', async () => {
    expect((await winterclay('count', path('scan.png'), '--json')).status).toBe(0)
    const run = await winterclay('count', path('text.png'), '--json')
    expect({ status: run.status, stdout: run.stdout }).toEqual({ status: 2, stdout: '' })
    expect(run.stderr).toMatch(/^winterclay count: [^\n]+\n$/)
  })
})

/** Words that name files of the folder become their paths. */
function inFolder(word: string): string {
  return /\.(png|json|csv)$/.test(word) || /^(file(\/below)?|OUT)$/.test(word) ? path(word) : word
}
