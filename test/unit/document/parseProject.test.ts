import { describe, expect, it } from 'vitest'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { addDate } from '../../../src/commands/reviseDate.ts'
import { addNote } from '../../../src/commands/reviseNote.ts'
import { need } from '../../../src/document/outcome.ts'
import { parseProject, projectToJson } from '../../../src/document/parseProject.ts'
import { emptyProject, findRecord, freshId, needRecord } from '../../../src/document/project.ts'
import { Fault } from '../../../worker/check.ts'
import { millimetres, pathPixels } from '../../../worker/units.ts'
import { after, countedState } from '../../fixtures/project.ts'

function fullProject() {
  let state = countedState([10, 20, 30])
  state = after(state, markSpan(state, { transect: 'transect-1', from: 60, to: 70, kind: 'event' }))
  state = after(state, addNote(state, { transect: 'transect-1', position: pathPixels(5), text: 'fish scale' }))
  return after(
    state,
    addDate(state, {
      ...{ kind: 'c14', label: 'leaf', top: millimetres(10), base: millimetres(12), value: 310, sigma: 25 },
      ...{ offset: 0, offsetSigma: 0, use: true },
    }),
  ).project
}

type Loose = Record<string, unknown>

/** The message for a project with one thing altered: `path` as `sections.0.scale`. */
function messageFor(path: string, value: unknown): string {
  const json = JSON.parse(JSON.stringify(projectToJson(fullProject()))) as Loose
  const keys = path.split('.')
  const last = keys.pop()!
  let holder = json
  for (const key of keys) holder = holder[key] as Loose
  if (value === undefined) Reflect.deleteProperty(holder, last)
  else holder[last] = value
  const outcome = parseProject(json)
  return outcome instanceof Fault ? outcome.message : 'taken in'
}

describe('parseProject', () => {
  it('reads back what projectToJson wrote', () => {
    for (const project of [emptyProject('p-1'), fullProject()]) {
      expect(need(parseProject(JSON.parse(JSON.stringify(projectToJson(project)))))).toEqual(project)
    }
  })

  const cases: [path: string, value: unknown, message: string][] = [
    ['core.lake', undefined, 'core.lake is missing'],
    ['core.lake', 5, 'core.lake must be text; it is 5'],
    ['core.lake', 'x'.repeat(201), `core.lake must be text of at most 200 characters; it is "${'x'.repeat(60)}…"`],
    ['core.coringYear', 1990.5, 'core.coringYear must be a whole number from -100000 to 3000; it is 1990.5'],
    ['core.topIntact', 'yes', 'core.topIntact must be true or false; it is "yes"'],
    ['core.more', 1, 'core has an unknown key "more"; known are name, lake, coringYear, topIntact, topYearOpen'],
    [
      'more',
      1,
      'this file has an unknown key "more"; known are schema, id, core, sections, transects, spans, counters, counts, dates, notes',
    ],
    ['id', 'a b', 'id must be an id of 1 to 64 letters, digits, - or _; it is "a b"'],
    ['id', '__proto__', 'id must be an id other than __proto__; it is "__proto__"'],
    ['sections', {}, 'sections must be a list; it is object'],
    [
      'sections.0.scale.mmPerPx',
      0,
      'sections[0].scale.mmPerPx must be a number greater than 0, at most 1000000; it is 0',
    ],
    [
      'sections.0.scan.sha256',
      'abc',
      'sections[0].scan.sha256 must be a SHA-256 of 64 hexadecimal digits; it is "abc"',
    ],
    [
      'sections.0.scan.width',
      1e12,
      'sections[0].scan.width must be a whole number from 1 to 10000000; it is 1000000000000',
    ],
    ['sections.0.scan.bits', 12, 'sections[0].scan.bits must be one of 8, 16; it is 12'],
    ['sections.0.orientation', null, 'sections[0].orientation must be an object; it is null'],
    [
      'sections.0.recipe.candidates.lamina',
      'grey',
      'sections[0].recipe.candidates.lamina must be one of dark, light, auto; it is "grey"',
    ],
    ['transects.0.section', 'section-9', 'transects[0]: the project has no section "section-9"'],
    [
      'transects.0.points',
      [{ x: 0, y: 0 }],
      'transects[0].points must be a path of at least 2 points; it is Array of 1',
    ],
    [
      'transects.0.points.1',
      { x: 0, y: 150 },
      'transects[0].points[1] must be another place than the point before it; it is "0, 150"',
    ],
    ['spans.0.to', 50, 'spans[0].to must be at or below from, 60; it is 50'],
    ['counts.0.counter', 'counter-7', 'counts[0]: the project has no counter "counter-7"'],
    [
      'counts.0.layers.id',
      [1, 2],
      'counts[0].layers.position must be as long as counts[0].layers.id, 2; it is Array of 3',
    ],
    ['counts.0.layers.id', [1, 2, 2], 'counts[0].layers: boundary 2 is already in this count'],
    [
      'counts.0.layers.position',
      [10, 30, 20],
      'counts[0].layers: a boundary at 20.00 px would lie on the one at 30.00 px; boundaries must be 0.25 px apart and in order: move or remove that one first',
    ],
    [
      'counts.0.layers.position.1',
      null,
      'counts[0].layers.position[1] must be a number from 0 to 10000000; it is null',
    ],
    [
      'counts.0.layers.mark.0',
      'sure',
      'counts[0].layers.mark[0] must be one of certain, doubtful, rejected; it is "sure"',
    ],
    [
      'counters',
      [
        { id: 'counter-1', name: 'A' },
        { id: 'counter-1', name: 'B' },
      ],
      'counters[1].id "counter-1" is already the id of another record',
    ],
    ['dates.0.sigma', 0, 'dates[0].sigma must be greater than 0; it is 0'],
    ['dates.0.base', 9, 'dates[0].base must be at or below top, 10; it is 9'],
    [
      'notes.0.text',
      'x'.repeat(5001),
      `notes[0].text must be text of at most 5000 characters; it is "${'x'.repeat(60)}…"`,
    ],
  ]
  for (const [path, value, message] of cases) {
    it(`refuses ${path} = ${value === undefined ? 'nothing' : JSON.stringify(value).slice(0, 40)}`, () => {
      expect(messageFor(path, value)).toBe(message)
    })
  }

  it('refuses what is no object at all', () => {
    for (const json of [null, 5, 'x', []]) {
      expect(parseProject(json)).toMatchObject({ message: 'schema must be a whole number from 1; it is undefined' })
    }
  })
})

describe('ids', () => {
  it('are fresh, whatever the records are called', () => {
    const project = fullProject()
    expect(freshId(project, 'counts')).toBe('count-2')
    const named = {
      ...project,
      counters: [
        { id: 'counter-12', name: 'x' },
        { id: 'anna', name: 'y' },
      ],
    }
    expect(freshId(named, 'counters')).toBe('counter-13')
  })

  it('that no record bears are named in the message', () => {
    expect(findRecord(fullProject(), 'counts', 'count-9')).toBeUndefined()
    expect(() => needRecord(fullProject(), 'counts', 'count-9')).toThrow('the project has no count "count-9"')
  })
})
