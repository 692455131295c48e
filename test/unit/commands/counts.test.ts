import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { addCounter } from '../../../src/commands/addCounter.ts'
import { importCounts } from '../../../src/commands/importCounts.ts'
import type { CountRow } from '../../../src/commands/importCounts.ts'
import { loadDemo } from '../../../src/commands/loadDemo.ts'
import { removeCount } from '../../../src/commands/removeCount.ts'
import { addDate, removeDate, reviseDate } from '../../../src/commands/reviseDate.ts'
import { setDepth } from '../../../src/commands/setDepth.ts'
import { startCount } from '../../../src/commands/startCount.ts'
import type { DemoFacts } from '../../../src/document/demoFacts.ts'
import { columnsOf } from '../../../src/document/layerSet.ts'
import { need } from '../../../src/document/outcome.ts'
import { parseProject, projectToJson } from '../../../src/document/parseProject.ts'
import type { CoreDate } from '../../../src/document/project.ts'
import { newState } from '../../../src/document/state.ts'
import { addSection } from '../../../src/commands/addSection.ts'
import { defaultRecipe } from '../../../worker/core/recipe.ts'
import { millimetres } from '../../../worker/units.ts'
import { after, countedState, inventedScan, startedState } from '../../fixtures/project.ts'

const transect = 'transect-1'

describe('startCount', () => {
  it('begins the next pass of a counter, blind when there are earlier counts', () => {
    let state = startedState()
    state = after(state, startCount(state, { transect, counterName: ' B ' }))
    state = after(state, startCount(state, { transect, counterName: 'A', blind: false }))
    const counts = state.project.counts.map(({ id, counter, pass, blind }) => [id, counter, pass, blind])
    expect(counts).toEqual([
      ['count-1', 'counter-1', 1, false],
      ['count-2', 'counter-2', 1, true],
      ['count-3', 'counter-1', 2, false],
    ])
    expect(state.project.counters.map(({ name }) => name)).toEqual(['A', 'B'])
  })

  it('refuses a counter without a name and a transect that is not there', () => {
    const state = startedState()
    expect(startCount(state, { transect, counterName: '  ' })).toMatchObject({
      message: 'a counter must have a name; it is empty',
    })
    expect(startCount(state, { transect: 'x', counterName: 'A' })).toMatchObject({
      message: 'the project has no transect "x"',
    })
  })
})

describe('counters and counts', () => {
  it('are added once and removed', () => {
    const state = startedState()
    expect(after(state, addCounter(state, { name: 'B' })).project.counters).toHaveLength(2)
    expect(addCounter(state, { name: 'A' })).toMatchObject({
      message: 'there is already a counter "A"; choose another name',
    })
    expect(after(state, removeCount(state, { count: 'count-1' })).project.counts).toEqual([])
  })
})

describe('importCounts', () => {
  const row = (line: number, depthMm: number): CountRow => ({ line, depthMm, mark: 'certain' })
  const take = (rows: CountRow[]) => importCounts(startedState(), { transect, counterName: 'B', rows })

  it('takes a table by depth as a count of its own', () => {
    let state = startedState()
    state = after(state, setDepth(state, { section: 'section-1', depthTop: millimetres(100) }))
    const rows: CountRow[] = [row(2, 101), { line: 3, depthMm: 102.5, mark: 'doubtful' }]
    state = after(state, importCounts(state, { transect, counterName: 'B', rows }))
    expect(columnsOf(state.project.counts[1].layers)).toEqual({
      id: [1, 2],
      position: [10, 25],
      mark: ['certain', 'doubtful'],
      origin: [5, 5],
    })
    expect(state.project.counts[1]).toMatchObject({ counter: 'counter-2', pass: 1, checkedTo: 25 })
  })

  it('refuses, by line, depths that are no numbers, reversed, double, or off the transect', () => {
    expect(take([row(2, 1), row(3, NaN)])).toMatchObject({ message: 'line 3: depth_mm must be a number; it is NaN' })
    expect(take([row(2, 5), row(3, 4)])).toMatchObject({
      message: 'line 3: depth_mm must grow from row to row; 4 comes after 5 (line 2). Sort the table by depth',
    })
    const double = 'line 3: depth_mm 5 is the same place on the scan as 5 (line 2); leave one of them out'
    expect(take([row(2, 5), row(3, 5)])).toMatchObject({ message: double })
    expect(take([row(2, 5), row(3, 5.01)])).toMatchObject({ message: double.replace('5 is', '5.01 is') })
    expect(take([row(2, 5), row(3, 500)])).toMatchObject({
      message:
        'line 3: depth_mm 500 is not on the transect, which reaches from 0.0 to 400.0 mm; ' +
        'check the depth and scale of the section',
    })
    expect(take([])).toMatchObject({ message: 'the table of counts has no rows; nothing to take in' })
  })

  it('refuses a section without a scale', () => {
    let state = newState('p')
    state = after(state, addSection(state, { scan: inventedScan, recipe: defaultRecipe }))
    expect(importCounts(state, { transect, counterName: 'B', rows: [row(2, 1)] })).toMatchObject({
      message: 'section "lake-1" has no scale yet; set it before taking in counts by depth',
    })
  })

  it('answers a table of 100,000 rows by the one that is wrong', () => {
    const rows = Array.from({ length: 100_000 }, (_, i) => row(i + 2, i * 0.004))
    rows[99_999] = row(100_001, -1)
    expect(take(rows)).toMatchObject({
      message: 'line 3: depth_mm 0.004 is the same place on the scan as 0 (line 2); leave one of them out',
    })
  })
})

describe('dates', () => {
  const leaf: Omit<CoreDate, 'id'> = {
    kind: 'c14',
    label: 'leaf',
    top: millimetres(10),
    base: millimetres(12),
    value: 310,
    sigma: 25,
    offset: 0,
    offsetSigma: 0,
    use: true,
  }

  it('are added, revised and removed', () => {
    let state = startedState()
    state = after(state, addDate(state, leaf))
    state = after(state, reviseDate(state, { date: 'date-1', use: false, sigma: 30 }))
    expect(state.project.dates).toEqual([{ id: 'date-1', ...leaf, use: false, sigma: 30 }])
    expect(after(state, removeDate(state, { date: 'date-1' })).project.dates).toEqual([])
  })

  it('refuse what no laboratory reports', () => {
    const state = startedState()
    expect(addDate(state, { ...leaf, sigma: 0 })).toMatchObject({
      message: 'date.sigma must be greater than 0; it is 0',
    })
    expect(addDate(state, { ...leaf, base: millimetres(9) })).toMatchObject({
      message: 'date.base must be at or below top, 10; it is 9',
    })
    expect(addDate(state, { ...leaf, value: NaN })).toMatchObject({
      message: 'date.value must be a number from -1000000 to 1000000; it is NaN',
    })
  })
})

describe('loadDemo', () => {
  const facts = JSON.parse(readFileSync('sample-images/scans/demo.json', 'utf8')) as DemoFacts
  const [width, height] = [facts.section.transect.points[1].x, 640]
  const scan = { ...inventedScan, name: facts.section.file, width, height }

  it('fills a new project with everything the demo has, in one act', () => {
    const state = newState('demo')
    const { project, version } = after(state, loadDemo(state, { facts, scan, recipe: defaultRecipe }))
    expect(version).toBe(1)
    expect(project.core).toEqual(facts.core)
    expect(project.sections[0]).toMatchObject({ name: facts.section.name, scale: { mmPerPx: facts.section.mmPerPx } })
    expect(project.transects[0]).toMatchObject(facts.section.transect)
    expect(project.spans).toHaveLength(facts.spans.length)
    expect(project.counts.map(({ layers }) => Array.from(layers.position))).toEqual(
      facts.counts.map(({ position }) => position),
    )
    expect(project.dates.map(({ id }) => id)).toEqual(facts.dates.map(({ id }) => id))
    expect(need(parseProject(JSON.parse(JSON.stringify(projectToJson(project)))))).toEqual(project)
  })

  it('is refused in a project that has sections', () => {
    expect(loadDemo(countedState([]), { facts, scan, recipe: defaultRecipe })).toMatchObject({
      message: 'the demo needs a new project; this one already has sections',
    })
  })
})
