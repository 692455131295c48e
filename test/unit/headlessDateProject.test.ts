import { readFileSync, writeFileSync } from 'node:fs'
import { beforeAll, describe, expect, it } from 'vitest'
import { acceptCandidates } from '../../src/commands/acceptCandidates.ts'
import { addSection } from '../../src/commands/addSection.ts'
import { loadDemo } from '../../src/commands/loadDemo.ts'
import { startCount } from '../../src/commands/startCount.ts'
import { newState } from '../../src/document/state.ts'
import type { DemoFacts } from '../../src/document/demoFacts.ts'
import { saveProjectFile } from '../../src/session/projectFile.ts'
import { readCsv } from '../../worker/core/csv.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import { inProcess, refused, scratchFolder } from '../fixtures/headless.ts'
import { after, inventedScan, startedState } from '../fixtures/project.ts'

const { path } = scratchFolder()
const facts = JSON.parse(readFileSync('sample-images/scans/demo.json', 'utf8')) as DemoFacts
const truth = JSON.parse(readFileSync('sample-images/truth/askelmere-1.json', 'utf8')) as { years: number[] }
const ages = (folder: string) => readCsv(readFileSync(path(folder, 'ages.csv'), 'utf8'), 'ages.csv').rows

async function save(name: string, state: ReturnType<typeof newState>): Promise<void> {
  writeFileSync(path(name), Buffer.from(await (await saveProjectFile(state)).arrayBuffer()))
}

beforeAll(async () => {
  const scan = { ...inventedScan, name: facts.section.file, width: 9314, height: 640 }
  const demo = after(newState('demo'), loadDemo(newState('demo'), { facts, scan, recipe: defaultRecipe }))
  await save('demo.zip', demo)
  await save('empty.zip', startedState())
  let unscaled = newState('unscaled')
  unscaled = after(unscaled, addSection(unscaled, { scan: inventedScan, recipe: defaultRecipe }))
  unscaled = after(unscaled, startCount(unscaled, { transect: 'transect-1', counterName: 'A' }))
  unscaled = after(unscaled, acceptCandidates(unscaled, { count: 'count-1', positions: [10, 20, 30] }))
  await save('unscaled.zip', unscaled)
})

describe('date PROJECT', () => {
  it('dates the demo by the model of its three counts: the truth lies in the 95.4 % range, the reworked wood is an outlier', async () => {
    const { status, stderr, stdout } = await inProcess('date', path('demo.zip'), '--out', path('made'), '--json')
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' })
    const summary = JSON.parse(stdout) as { top_year: number; outliers: string[]; missed_rate_from: string }
    expect(summary).toMatchObject({ top_year: 2018, missed_rate_from: 'repeat counts' })
    expect(summary.outliers).toHaveLength(1)
    const rows = ages('made')
    const [from, to] = (rows.at(-1)?.[6] ?? '').split(/\.\.|;/).map(Number)
    const oldest = truth.years.at(-1) ?? NaN
    expect(from - 2).toBeLessThanOrEqual(oldest)
    expect(to + 2).toBeGreaterThanOrEqual(oldest)
  })

  it('refuses a project without counts, without a scale, another file, and tables beside a project', async () => {
    expect(await refused('date', path('empty.zip'), '--out', path('x'))).toContain(
      'no section of the project has been counted',
    )
    expect(await refused('date', path('unscaled.zip'), '--out', path('x'))).toContain(
      'has no scale; set it before dating',
    )
    expect(await refused('date', path('none.zip'), '--out', path('x'))).toContain('it does not exist')
    writeFileSync(path('text.zip'), 'no project')
    expect(await refused('date', path('text.zip'), '--out', path('x'))).toContain('project file')
    expect(await refused('date', path('demo.zip'), '--layers', 'l.csv', '--out', path('x'))).toContain(
      '--layers cannot be given with a project; it has its own',
    )
  })
})
