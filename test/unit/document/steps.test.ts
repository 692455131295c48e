import { describe, expect, it } from 'vitest'
import { markBoundaries } from '../../../src/commands/markBoundaries.ts'
import { attempt, need } from '../../../src/document/outcome.ts'
import { liftLayers, markLayers, moveLayers, placeLayers, setChecked } from '../../../src/document/layerSteps.ts'
import { findRecord, needRecord } from '../../../src/document/project.ts'
import type { Project } from '../../../src/document/project.ts'
import { addRecord, changeCore, changeRecord, removeRecord } from '../../../src/document/recordSteps.ts'
import { applyStep, applySteps, mergeSteps, readStep } from '../../../src/document/steps.ts'
import type { Step } from '../../../src/document/steps.ts'
import { Fault } from '../../../worker/check.ts'
import { countedState } from '../../fixtures/project.ts'
import { proveMerge, proveStep } from '../../fixtures/proveStep.ts'

const { project } = countedState([10, 20, 30, 40])
const countOf = (from: Project) => needRecord(from, 'counts', 'count-1')
const columns = (id: number, position: number) => ({
  id: [id],
  position: [position],
  mark: ['doubtful' as const],
  origin: [9],
})

/** A first step from `project`, and a second made from what the first leaves. */
const pairs: Record<string, [first: (from: Project) => Step, second: (from: Project) => Step]> = {
  core: [(from) => changeCore(from, { lake: 'Tarn' })!, (from) => changeCore(from, { lake: 'Mere', name: 'M1' })!],
  change: [
    (from) => changeRecord(from, 'sections', 'section-1', { name: 'Upper' })!,
    (from) => changeRecord(from, 'sections', 'section-1', { name: 'Top', scale: null })!,
  ],
  place: [(from) => placeLayers(countOf(from), columns(5, 25)), (from) => placeLayers(countOf(from), columns(6, 15))],
  lift: [(from) => liftLayers(countOf(from), [3]), (from) => liftLayers(countOf(from), [4, 1])],
  move: [
    (from) => moveLayers(countOf(from), [2, 3], [21, 31], 9),
    (from) => moveLayers(countOf(from), [3, 1], [33, 9], 10),
  ],
  mark: [
    (from) => markLayers(countOf(from), [2], ['doubtful'], 9),
    (from) => markLayers(countOf(from), [1, 2], ['rejected', 'certain'], 10),
  ],
  check: [(from) => setChecked(countOf(from), 12)!, (from) => setChecked(countOf(from), 44)!],
}

describe('a kind of step', () => {
  for (const [kind, [makeFirst, makeSecond]] of Object.entries(pairs)) {
    it(`${kind}: applies, inverts, survives JSON, and merges with one that continues it`, () => {
      const first = makeFirst(project)
      const between = proveStep(project, first, kind)
      const second = makeSecond(between)
      proveStep(between, second, kind)
      expect(proveMerge(project, first, second, kind)?.kind).toBe(kind)
    })
  }

  it('add and remove: apply, invert and survive JSON, with boundaries and all', () => {
    const date = {
      id: 'date-1',
      kind: 'year',
      label: 'ash',
      top: 1,
      base: 2,
      value: 1875,
      sigma: 0,
      offset: 0,
      offsetSigma: 0,
      use: true,
    }
    proveStep(project, addRecord(project, 'dates', date as never), 'add')
    const without = proveStep(project, removeRecord(project, 'counts', 'count-1'), 'remove')
    expect(findRecord(without, 'counts', 'count-1')).toBeUndefined()
  })

  it('does not merge with one on another count, of another kind, or that starts elsewhere', () => {
    const move = moveLayers(countOf(project), [2], [21], 9)
    expect(mergeSteps(move, { ...move, count: 'count-2' })).toBeNull()
    expect(mergeSteps(move, markLayers(countOf(project), [2], ['doubtful'], 9))).toBeNull()
    expect(mergeSteps(move, move)).toBeNull()
    const place = placeLayers(countOf(project), columns(5, 25))
    expect(mergeSteps(place, place)).toBeNull()
    const check = setChecked(countOf(project), 12)!
    expect(mergeSteps(check, check)).toBeNull()
    const core = changeCore(project, { lake: 'Tarn' })!
    expect(mergeSteps(core, core)).toBeNull()
  })
})

function refusal(step: Step): string {
  const outcome = applyStep(project, step)
  expect(outcome).toBeInstanceOf(Fault)
  return (outcome as Fault).message
}

describe('a step that does not fit the project', () => {
  it('is refused when a boundary is not what it started from', () => {
    const stale = moveLayers(countOf(project), [2], [21], 9)
    expect(refusal({ ...stale, before: { position: [19], origin: [4] } })).toBe(
      'boundary 2 of count-1 is not what this edit started from: its position is 20',
    )
    expect(refusal({ ...stale, id: [77] })).toBe('boundary 77 is not in this count, or is named twice')
  })

  it('is refused when a field is not what it started from', () => {
    expect(refusal({ kind: 'core', before: { lake: 'Other' }, after: { lake: 'Mere' } })).toBe(
      'core.lake is not what this edit started from',
    )
    expect(
      refusal({ kind: 'change', collection: 'sections', id: 'section-1', before: { name: 'x' }, after: { name: 'y' } }),
    ).toBe('section "section-1".name is not what this edit started from')
    expect(refusal({ kind: 'check', count: 'count-1', before: 5, after: 6 })).toBe(
      'count-1 is checked to 0 px, not to 5 px from where this edit started',
    )
  })

  it('is refused when it would orphan a record, or refers to none', () => {
    expect(refusal(removeRecord(project, 'counters', 'counter-1'))).toBe(
      'counter "counter-1" still has the count "count-1"; remove that first',
    )
    const span = { id: 'span-1', transect: 'transect-9', from: 1, to: 2, kind: 'event', note: '' } as const
    expect(refusal({ kind: 'add', collection: 'spans', index: 0, record: span })).toBe(
      'the project has no transect "transect-9"',
    )
  })

  it('is refused when the record is there already, or its place is beyond the end', () => {
    const counter = { id: 'counter-1', name: 'A' }
    expect(refusal({ kind: 'add', collection: 'counters', index: 1, record: counter })).toBe(
      'the project already has a counter "counter-1"',
    )
    expect(refusal({ kind: 'add', collection: 'counters', index: 5, record: { ...counter, id: 'counter-2' } })).toBe(
      'counters has 1 records; none can go in at 5',
    )
    expect(refusal({ kind: 'remove', collection: 'counters', index: 0, record: { ...counter, name: 'B' } })).toBe(
      'counter "counter-1" is not what this edit started from',
    )
  })

  it('leaves the project as it was when a later step of several fails', () => {
    const good = setChecked(countOf(project), 12)!
    const before = structuredClone(project)
    expect(applySteps(project, [good, good])).toBeInstanceOf(Fault)
    expect(project).toEqual(before)
  })
})

describe('a step from JSON', () => {
  const move = moveLayers(countOf(project), [2], [21], 9)
  const cases: [claim: string, json: unknown, message: string][] = [
    [
      'no object',
      null,
      'step.kind must be one of core, add, remove, change, place, lift, move, mark, check; it is undefined',
    ],
    [
      'an unknown kind',
      { kind: '__proto__' },
      'step.kind must be one of core, add, remove, change, place, lift, move, mark, check; it is "__proto__"',
    ],
    [
      'an unknown key',
      { ...move, extra: 1 },
      'step has an unknown key "extra"; known are kind, count, id, before, after',
    ],
    ['a missing key', { kind: 'move', count: 'count-1', id: [2], before: move.before }, 'step.after is missing'],
    [
      'columns of unequal length',
      { ...move, id: [2, 3] },
      'step.before.position must be as long as step.id, 2; it is Array of 1',
    ],
    [
      'no boundary',
      { ...move, id: [], before: { position: [], origin: [] }, after: { position: [], origin: [] } },
      'step.id must be at least one boundary; it is Array of 0',
    ],
    [
      'a position off any scan',
      { ...move, after: { position: [1e9], origin: [9] } },
      'step.after.position[0] must be a number from 0 to 10000000; it is 1000000000',
    ],
    [
      'a position that is none',
      { ...move, after: { position: [null], origin: [9] } },
      'step.after.position[0] must be a number from 0 to 10000000; it is null',
    ],
    [
      'keys that differ before and after',
      { kind: 'core', before: { lake: '' }, after: { name: '' } },
      'step.after must be an object with the keys of step.before, lake; it is object',
    ],
    [
      'a change of an id',
      { kind: 'change', collection: 'counters', id: 'c', before: { id: 'c' }, after: { id: 'd' } },
      'step.before has an unknown key "id"; known are name',
    ],
    [
      'boundaries changed as a field',
      { kind: 'change', collection: 'counts', id: 'c', before: { layers: {} }, after: { layers: {} } },
      'step.before has an unknown key "layers"; known are transect, counter, pass, blind',
    ],
    [
      'a collection that is none',
      { kind: 'add', collection: 'constructor', index: 0, record: {} },
      'step.collection must be one of sections, transects, spans, counters, counts, dates, notes; it is "constructor"',
    ],
  ]
  for (const [claim, json, message] of cases) {
    it(`is refused with ${claim}`, () => {
      expect(attempt(() => readStep(json, 'step'))).toMatchObject({ name: 'Fault', code: 'format', message })
    })
  }

  it('cannot reach a prototype by a hostile key', () => {
    const hostile: unknown = JSON.parse(
      '{"kind":"core","before":{"__proto__":{"lake":"x"}},"after":{"__proto__":{"lake":"y"}}}',
    )
    expect(() => readStep(hostile, 'step')).toThrow(
      'step.before has an unknown key "__proto__"; known are name, lake, coringYear, topIntact, topYearOpen',
    )
    expect(({} as { lake?: string }).lake).toBeUndefined()
  })
})

describe('a maker of steps', () => {
  it('answers null when nothing would change', () => {
    expect(changeCore(project, { lake: '' })).toBeNull()
    expect(changeRecord(project, 'counters', 'counter-1', { name: 'A' })).toBeNull()
    expect(setChecked(countOf(project), 0)).toBeNull()
    expect(need(markBoundaries(countedState([10]), { count: 'count-1', ids: [1], mark: 'certain' })).steps).toEqual([])
  })
})
