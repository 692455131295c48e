import { describe, expect, it } from 'vitest'
import { bringCounts } from '../../../src/commands/bringCounts.ts'
import { joinLayers } from '../../../src/commands/joinLayers.ts'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { addNote } from '../../../src/commands/reviseNote.ts'
import { beginAgreed, settleSite } from '../../../src/commands/settleSites.ts'
import { splitLayer } from '../../../src/commands/splitLayer.ts'
import { startCount } from '../../../src/commands/startCount.ts'
import { columnsOf } from '../../../src/document/layerSet.ts'
import { need } from '../../../src/document/outcome.ts'
import { compareLayers, projectAt } from '../../../src/document/projectAt.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import { countingPacket } from '../../../src/session/countingPacket.ts'
import { notesInSight } from '../../../src/session/notesInSight.ts'
import { pathPixels } from '../../../worker/units.ts'
import { after, countedState, stampAt } from '../../fixtures/project.ts'

const transect = 'transect-1'

/** Home with A's count of three, a note and an event bed; and the packet, counted by B at two places. */
function countedElsewhere(): { home: WorkbenchState; away: WorkbenchState; packet: WorkbenchState } {
  let home = countedState([100, 200, 300])
  home = after(home, addNote(home, { transect, position: pathPixels(200), text: 'year 2 is thin' }))
  home = after(home, markSpan(home, { transect, kind: 'event', from: 400, to: 450, note: 'below year 3' }))
  const packet = countingPacket(home, transect, 'packet-1', stampAt(0))
  let away = after(packet, startCount(packet, { transect, counterName: 'B' }))
  for (const position of [101, 303]) away = after(away, placeBoundary(away, { count: 'count-1', position }))
  return { home, away, packet }
}

describe('a counting packet', () => {
  it('holds section, transect and spans, and nothing that could lead a counter', () => {
    const { home, packet } = countedElsewhere()
    expect(packet.project.sections).toEqual(home.project.sections)
    expect(packet.project.transects).toEqual(home.project.transects)
    expect(packet.project.spans.map(({ kind, note }) => [kind, note])).toEqual([['event', '']])
    for (const collection of ['counts', 'counters', 'notes', 'dates'] as const)
      expect(packet.project[collection]).toEqual([])
    expect(packet.version).toBe(1)
    expect(JSON.stringify(packet.journal.slice(1))).not.toMatch(/is thin|below year/)
  })
})

describe('bringing counts home', () => {
  it('adds a pass and its notes and leaves the others as they are', () => {
    const { home, away } = countedElsewhere()
    const noted = after(away, addNote(away, { transect, position: pathPixels(303), text: 'sharp cap' }))
    const merged = after(home, bringCounts(home, { from: noted.project })).project
    expect(merged.counts[0]).toBe(home.project.counts[0])
    expect(merged.counts[1]).toMatchObject({ pass: 1, blind: true })
    expect(Array.from(merged.counts[1].layers.position)).toEqual([101, 303])
    expect(merged.counters.map(({ name }) => name)).toEqual(['A', 'B'])
    expect(merged.notes.map(({ text }) => text)).toEqual(['year 2 is thin', 'sharp cap'])
  })
  it('adds further passes of a counter known here under the next number', () => {
    const { home, packet } = countedElsewhere()
    let away = after(packet, startCount(packet, { transect, counterName: 'A' }))
    away = after(away, placeBoundary(away, { count: 'count-1', position: 150 }))
    const { counts } = after(home, bringCounts(home, { from: away.project })).project
    expect(counts.map(({ counter, pass }) => [counter, pass])).toEqual([
      ['counter-1', 1],
      ['counter-1', 2],
    ])
  })
  it('refuses what is here already, an empty file, another scan and another line', () => {
    const { home, away, packet } = countedElsewhere()
    const merged = after(home, bringCounts(home, { from: away.project }))
    expect(bringCounts(merged, { from: away.project })).toMatchObject({
      message: 'every count of this file is in this project already',
    })
    expect(bringCounts(home, { from: packet.project })).toMatchObject({
      message: 'this file holds no count with boundaries; nothing to bring home',
    })
    const [section] = away.project.sections
    const other = { ...section, scan: { ...section.scan, sha256: 'f'.repeat(64) } }
    expect(bringCounts(home, { from: { ...away.project, sections: [other] } })).toMatchObject({ field: 'scan' })
    const [line] = away.project.transects
    const moved = { ...line, points: line.points.map(({ x, y }) => ({ x, y: y + 1 })) } as typeof line
    expect(bringCounts(home, { from: { ...away.project, transects: [moved] } })).toMatchObject({ field: 'transect' })
  })
})

describe('settling', () => {
  const begun = () => {
    const state = countedState([100])
    const sites = [
      { position: 300, mark: 'doubtful' as const },
      { position: 100, mark: 'certain' as const },
    ]
    return after(state, beginAgreed(state, { transect, sites }))
  }
  it('begins with the sites all agree on, and takes each difference in with its reason', () => {
    let state = begun()
    const settlement = {
      count: 'count-2',
      position: 200,
      mark: 'rejected',
      reason: ' a doublet ',
      before: null,
    } as const
    state = after(state, settleSite(state, settlement))
    expect(columnsOf(state.project.counts[1].layers)).toMatchObject({
      position: [100, 200, 300],
      mark: ['certain', 'rejected', 'doubtful'],
    })
    expect(state.project.notes[0]).toMatchObject({ position: 200, text: 'Settled as no year: a doublet' })
    const before = state.project.counts[1].layers.id[1]
    state = after(state, settleSite(state, { ...settlement, mark: 'certain', before }))
    expect(columnsOf(state.project.counts[1].layers).mark).toEqual(['certain', 'certain', 'doubtful'])
  })
  it('refuses a settlement without a reason', () => {
    const settlement = { count: 'count-2', position: 200, mark: 'certain', reason: ' ', before: null } as const
    expect(settleSite(begun(), settlement)).toMatchObject({
      message: 'a reason is needed to settle a difference; give one',
    })
  })
})

describe('split and join', () => {
  it('are called so in the history; a joined boundary is remembered as rejected', () => {
    let state = countedState([100, 200])
    const split = need(splitLayer(state, { count: 'count-1', position: 150 }))
    expect(split.userEvent).toBe('split')
    state = after(state, split)
    const join = need(joinLayers(state, { count: 'count-1', boundary: 2 }))
    expect(join.userEvent).toBe('join')
    expect(columnsOf(after(state, join).project.counts[0].layers).mark).toEqual(['certain', 'certain', 'rejected'])
  })
})

describe('looking back', () => {
  it('gives the project as it was after every edit', () => {
    const states = [countedState([100, 200])]
    for (const position of [150, 250, 350]) {
      const state = states[states.length - 1]
      states.push(after(state, placeBoundary(state, { count: 'count-1', position })))
    }
    const last = states[states.length - 1]
    for (const state of states) expect(projectAt(last, state.version)).toEqual(state.project)
    expect(projectAt(last, last.version + 1)).toMatchObject({
      message: `the history holds edits 0 to ${last.version}; there is no edit ${last.version + 1} to go back to`,
    })
    const changes = compareLayers(states[0].project.counts[0].layers, last.project.counts[0].layers)
    expect(changes).toEqual({ added: [150, 250, 350], removed: [], moved: [], marked: [] })
  })
})

describe('notes beside a blind count', () => {
  it('are only those written since it began', () => {
    let state = countedState([100])
    state = after(state, addNote(state, { transect, position: pathPixels(100), text: 'before' }))
    state = after(state, startCount(state, { transect, counterName: 'B' }))
    state = after(state, addNote(state, { transect, position: pathPixels(50), text: 'since' }))
    const seen = (blind: boolean) =>
      notesInSight(state.project.notes, state.journal, transect, blind ? state.project.counts[1] : null)
    expect(seen(true).map(({ text }) => text)).toEqual(['since'])
    expect(seen(false).map(({ text }) => text)).toEqual(['since', 'before'])
  })
})
