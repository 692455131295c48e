import { Fault } from '../../worker/check.ts'
import { pathPixels } from '../../worker/units.ts'
import { columnsOf, layersFromColumns } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId, needRecord } from '../document/project.ts'
import type { Count, Project } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import { sameJson } from '../document/sameJson.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { counterNamed } from './addCounter.ts'
import { Draft, makeEdit } from './edit.ts'
import { nextPass } from './startCount.ts'

/**
 * Brings the counts of another project home as further passes of their counters, with the notes written there. Nothing
 * that is here already is touched. Refused when scan, orientation or transect differ, for then its positions mean other
 * places, and when there is nothing new. Boundaries have this edit as their origin.
 */
export function bringCounts(state: WorkbenchState, { from }: { from: Project }): Outcome<Edit> {
  return makeEdit('bring', () => {
    const made = from.counts.filter(({ layers }) => layers.position.length > 0)
    if (made.length === 0) {
      throw new Fault('argument', 'counts', 0, 'this file holds no count with boundaries; nothing to bring home')
    }
    const homes = made.map((count) => ({ count, transect: homeOf(state.project, from, count) }))
    const fresh = homes.filter(({ count, transect }) => !isHere(state.project, from, count, transect))
    if (fresh.length === 0) {
      throw new Fault('conflict', 'counts', made.length, 'every count of this file is in this project already')
    }
    const draft = new Draft(state.project)
    for (const { count, transect } of fresh) addCount(draft, from, count, transect, state.version + 1)
    const transects = new Map(fresh.map(({ count, transect }) => [count.transect, transect]))
    addNotes(draft, from, transects)
    return draft.steps
  })
}

/** The transect here along which the count was made there. */
function homeOf(project: Project, from: Project, count: Count): string {
  const there = needRecord(from, 'transects', count.transect)
  const section = needRecord(from, 'sections', there.section)
  const sections = project.sections.filter(({ scan }) => scan.sha256 === section.scan.sha256)
  if (sections.length === 0) {
    const message = `this count was made on another scan, ${section.scan.name}, whose content is none of this project's; open the project it belongs to`
    throw new Fault('conflict', 'scan', section.scan.sha256, message)
  }
  const turned = sections.filter(({ orientation }) => sameJson(orientation, section.orientation))
  const own = new Set(turned.map(({ id }) => id))
  const transect = project.transects.find((one) => own.has(one.section) && sameJson(one.points, there.points))
  if (!transect) {
    const message = `this count was made along another line of ${section.scan.name} than any transect here; move the transect back to where it was when the packet was made (Undo), then bring the count home`
    throw new Fault('conflict', 'transect', there.id, message)
  }
  return transect.id
}

function nameOf(project: Project, count: Count): string {
  return needRecord(project, 'counters', count.counter).name
}

/** Whether the very same count is here already, so that bringing a file home twice changes nothing. */
function isHere(project: Project, from: Project, count: Count, transect: string): boolean {
  return project.counts.some(
    (one) =>
      one.transect === transect && nameOf(project, one) === nameOf(from, count) && sameMarks(one.layers, count.layers),
  )
}

function sameMarks(a: LayerSet, b: LayerSet): boolean {
  return (
    a.position.length === b.position.length &&
    a.position.every((position, i) => position === b.position[i] && a.mark[i] === b.mark[i])
  )
}

function addCount(draft: Draft, from: Project, count: Count, transect: string, origin: number): void {
  const { counter, added } = counterNamed(draft.project, nameOf(from, count))
  draft.add(added)
  const columns = columnsOf(count.layers)
  const layers = layersFromColumns({ ...columns, origin: columns.id.map(() => origin) })
  // Where no other count could be seen, the count was blind whatever it was called there.
  const alone = from.counts.every((other) => other === count || other.transect !== count.transect)
  const pass = nextPass(draft.project, transect, counter.id, count.blind || alone)
  draft.add(addRecord(draft.project, 'counts', { ...pass, layers, checkedTo: count.checkedTo }))
}

function addNotes(draft: Draft, from: Project, transects: ReadonlyMap<string, string>): void {
  for (const { transect: there, position, text } of from.notes) {
    const transect = transects.get(there)
    if (transect === undefined) continue
    const known = draft.project.notes.some(
      (note) => note.transect === transect && note.position === position && note.text === text,
    )
    if (known) continue
    const note = { id: freshId(draft.project, 'notes'), transect, position: pathPixels(position), text }
    draft.add(addRecord(draft.project, 'notes', note))
  }
}
