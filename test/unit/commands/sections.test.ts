import { describe, expect, it } from 'vitest'
import { addSection } from '../../../src/commands/addSection.ts'
import { addTransect } from '../../../src/commands/addTransect.ts'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { moveTransect } from '../../../src/commands/moveTransect.ts'
import { removeSection, removeTransect } from '../../../src/commands/removeSection.ts'
import { renameSection } from '../../../src/commands/renameSection.ts'
import { reviseCore } from '../../../src/commands/reviseCore.ts'
import { addNote } from '../../../src/commands/reviseNote.ts'
import { setMasks, setTilt, setTransectWidth } from '../../../src/commands/reviseTransect.ts'
import { setCheckedTo } from '../../../src/commands/setCheckedTo.ts'
import { setDepth } from '../../../src/commands/setDepth.ts'
import { setOrientation } from '../../../src/commands/setOrientation.ts'
import { setScale } from '../../../src/commands/setScale.ts'
import { undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { applyTransaction, newState } from '../../../src/document/state.ts'
import { axisPosition } from '../../../worker/core/transect.ts'
import { defaultRecipe } from '../../../worker/core/recipe.ts'
import { calYear, millimetres, pathPixels, scanPixels } from '../../../worker/units.ts'
import type { Point } from '../../../worker/units.ts'
import { after, countedState, inventedScan, stampAt, startedState } from '../../fixtures/project.ts'

const section = 'section-1'
const transect = 'transect-1'
const at = (x: number, y: number): Point => ({ x: scanPixels(x), y: scanPixels(y) })

describe('addSection', () => {
  it('lays a transect down the middle of the longer axis and names the section after the file', () => {
    const state = newState('p')
    const { project } = after(state, addSection(state, { scan: inventedScan, recipe: defaultRecipe }))
    expect(project.sections[0]).toMatchObject({
      id: 'section-1',
      name: 'lake-1',
      orientation: { axis: 'x', young: 'low' },
      scale: null,
      depthTop: 0,
      scan: inventedScan,
    })
    expect(project.transects[0]).toMatchObject({ section: 'section-1', points: [at(0, 150), at(4000, 150)] })
  })

  it('puts the next section below the last', () => {
    const state = startedState()
    const { project } = after(state, addSection(state, { scan: inventedScan, recipe: defaultRecipe }))
    expect(project.sections[1].depthTop).toBe(400)
  })

  it('takes in nothing of a scan but what a project keeps', () => {
    const state = newState('p')
    const scan = { ...inventedScan, levels: [], notes: ['alpha channel ignored'], format: 'tiff' as const }
    const { project } = after(state, addSection(state, { scan, recipe: defaultRecipe }))
    expect(Object.keys(project.sections[0].scan)).toEqual(Object.keys(inventedScan))
  })
})

describe('what is known of a section', () => {
  it('is set: name, scale, depth, core', () => {
    let state = startedState()
    state = after(state, renameSection(state, { section, name: '  Upper ' }))
    state = after(state, setScale(state, { section, mmPerPx: 0.05, basis: 'ruler' }))
    state = after(state, setDepth(state, { section, depthTop: millimetres(120) }))
    state = after(state, reviseCore(state, { coringYear: calYear(2019), topIntact: true }))
    expect(state.project.sections[0]).toMatchObject({
      name: 'Upper',
      scale: { mmPerPx: 0.05, basis: 'ruler' },
      depthTop: 120,
    })
    expect(state.project.core).toMatchObject({ coringYear: 2019, topIntact: true })
  })

  it('refuses what cannot be', () => {
    const state = startedState()
    expect(setScale(state, { section, mmPerPx: 0, basis: 'typed' })).toMatchObject({
      message: 'scale in mm per pixel must be a number greater than 0; it is 0',
    })
    expect(setScale(state, { section, mmPerPx: NaN, basis: 'typed' })).toMatchObject({
      message: 'scale in mm per pixel must be a number greater than 0; it is NaN',
    })
    expect(setDepth(state, { section, depthTop: millimetres(Infinity) })).toMatchObject({
      message: 'depth of the top in mm must be a finite number; it is Infinity',
    })
    expect(renameSection(state, { section, name: ' ' })).toMatchObject({
      message: 'a section must have a name; it is empty',
    })
    expect(reviseCore(state, { coringYear: calYear(9999) })).toMatchObject({
      message: 'core.coringYear must be a whole number from -100000 to 3000; it is 9999',
    })
    expect(setDepth(state, { section: 'section-9', depthTop: millimetres(1) })).toMatchObject({
      message: 'the project has no section "section-9"',
    })
  })
})

describe('setOrientation', () => {
  it('lays bare transects anew', () => {
    const state = startedState()
    const turned = after(state, setOrientation(state, { section, orientation: { axis: 'x', young: 'high' } }))
    expect(turned.project.transects[0].points).toEqual([at(4000, 150), at(0, 150)])
  })

  it('is refused once something was marked', () => {
    const orientation = { axis: 'x', young: 'high' } as const
    expect(setOrientation(countedState([10, 20]), { section, orientation })).toMatchObject({
      message:
        'the orientation must be set before counting; this section already has 2 boundaries of count-1. ' +
        'Add the scan again as a new section, turned as it should be',
    })
  })
})

describe('moveTransect', () => {
  /** Boundaries, a span, a note and a place checked to, along the straight default path. */
  function marked() {
    let state = countedState([100, 2000, 3900])
    state = after(state, markSpan(state, { transect, from: 500, to: 600, kind: 'event' }))
    state = after(state, addNote(state, { transect, position: pathPixels(700), text: 'here' }))
    return after(state, setCheckedTo(state, { count: 'count-1', to: 2500 }))
  }
  const slanting = [at(0, 50), at(2000, 250), at(4000, 50)]

  it('keeps the depth of everything marked along it', () => {
    const state = marked()
    const moved = after(state, moveTransect(state, { transect, points: slanting }))
    const { project } = moved
    const depth = (position: number) =>
      axisPosition(project.transects[0], project.sections[0].orientation, inventedScan, position)
    const places = [
      ...project.counts[0].layers.position,
      ...[project.spans[0].from, project.spans[0].to, project.notes[0].position, project.counts[0].checkedTo],
    ]
    const before = [100, 2000, 3900, 500, 600, 700, 2500]
    places.forEach((position, i) => {
      expect(depth(position)).toBeCloseTo(before[i], 6)
      expect(position).toBeGreaterThan(before[i])
    })
    expect(project.counts[0].layers.origin).toEqual(Uint32Array.of(8, 8, 8))
    expect(need(applyTransaction(moved, undo(moved, stampAt(9))!)).project).toEqual(state.project)
  })

  it('leaves marks alone when the path only shifts sideways', () => {
    const state = marked()
    const moved = after(state, moveTransect(state, { transect, points: [at(0, 100), at(4000, 100)] }))
    expect(moved.journal.last?.steps).toHaveLength(1)
    expect(moved.project.counts).toEqual(state.project.counts)
  })

  it('refuses a path that does not reach the boundaries or a span', () => {
    expect(moveTransect(marked(), { transect, points: [at(200, 150), at(3000, 150)] })).toMatchObject({
      message: 'the new path does not reach 2 of the 3 boundaries of count-1; let it begin above and end below them',
    })
    let state = startedState()
    state = after(state, markSpan(state, { transect, from: 3500, to: 3600, kind: 'event' }))
    expect(moveTransect(state, { transect, points: [at(0, 150), at(3000, 150)] })).toMatchObject({
      message: 'the new path does not reach the span span-1; let it pass there, or remove the span first',
    })
    const drawnIn = after(state, moveTransect(state, { transect, points: [at(0, 150), at(3550, 150)] }))
    expect(drawnIn.project.spans[0]).toMatchObject({ from: 3500, to: 3550 })
  })

  it('refuses a path that no profile can be read along', () => {
    expect(moveTransect(startedState(), { transect, points: [at(0, 150), at(5000, 150)] })).toMatchObject({
      message: 'transect.points[1] must lie on the scan of 4000 x 300 pixels; it is at 5000, 150',
    })
  })
})

describe('transects', () => {
  it('are added, widened, tilted, masked and removed with what is on them', () => {
    let state = countedState([10])
    const another = { points: [at(0, 80), at(4000, 80)], width: scanPixels(40), tilt: null, masks: [] }
    state = after(state, addTransect(state, { section, ...another }))
    const id = 'transect-2'
    const mask = [at(5, 5), at(9, 5), at(9, 9)]
    state = after(state, setTransectWidth(state, { transect: id, width: scanPixels(60) }))
    state = after(state, setTilt(state, { transect: id, tilt: 0.1 }))
    state = after(state, setMasks(state, { transect: id, masks: [mask] }))
    expect(state.project.transects[1]).toEqual({ id, section, ...another, width: 60, tilt: 0.1, masks: [mask] })
    expect(setTransectWidth(state, { transect: id, width: scanPixels(0) })).toMatchObject({
      message: 'transect.width must be between 1 pixel and the breadth of the scan (300); it is 0',
    })
    const without = after(state, removeTransect(state, { transect }))
    expect(without.project.counts).toEqual([])
    expect(without.project.transects.map((one) => one.id)).toEqual([id])
  })
})

describe('removeSection', () => {
  it('takes all that was made on it along, and undo brings everything back', () => {
    let state = countedState([10, 20])
    state = after(state, markSpan(state, { transect, from: 500, to: 600, kind: 'event' }))
    const removed = after(state, removeSection(state, { section }))
    expect(removed.project).toMatchObject({
      sections: [],
      transects: [],
      spans: [],
      counts: [],
      counters: [{ name: 'A' }],
    })
    expect(need(applyTransaction(removed, undo(removed, stampAt(9))!)).project).toEqual(state.project)
  })
})
