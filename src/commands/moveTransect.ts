import { Fault } from '../../worker/check.ts'
import { axisPosition, checkTransect, distanceAtAxis } from '../../worker/core/transect.ts'
import { pathPixels } from '../../worker/units.ts'
import type { PathPixels, Point } from '../../worker/units.ts'
import { moveLayers, setChecked } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { Count, Project, SectionTransect } from '../document/project.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { Draft, makeEdit } from './edit.ts'

/** A mark that would move by less than this stays where it is, path pixels. */
const still = 1e-6

/**
 * Lays a transect anew. Whatever is marked along it keeps its depth: boundaries, spans and notes are carried over through
 * the geometry of the two paths in the same act. Refused when the new path does not reach one of the boundaries.
 */
export function moveTransect(
  state: WorkbenchState,
  { transect: id, points }: { transect: string; points: Point[] },
): Outcome<Edit> {
  return makeEdit('transect.move', () => {
    const draft = new Draft(state.project)
    const before = needRecord(state.project, 'transects', id)
    const after = { ...before, points }
    checkTransect(needRecord(state.project, 'sections', before.section).scan, after)
    const carry = carrierBetween(state.project, before, after)
    draft.add(changeRecord(state.project, 'transects', id, { points }))
    if (draft.steps.length === 0) return []
    for (const count of state.project.counts) {
      if (count.transect === id) carryCount(draft, count, carry, state.version + 1)
    }
    carrySpansAndNotes(draft, id, carry)
    return draft.steps
  })
}

interface Carried {
  position: PathPixels
  /** The new path reaches the depth of the mark. */
  reached: boolean
}

/** Takes a distance along the old path to that of the same depth along the new one. */
function carrierBetween(project: Project, before: SectionTransect, after: SectionTransect) {
  const { orientation, scan } = needRecord(project, 'sections', before.section)
  return (position: number): Carried => {
    const depth = axisPosition(before, orientation, scan, position)
    const carried = distanceAtAxis(after, orientation, scan, depth)
    const reached = Math.abs(axisPosition(after, orientation, scan, carried) - depth) < still
    return { position: Math.abs(carried - position) < still ? pathPixels(position) : carried, reached }
  }
}

type Carrier = ReturnType<typeof carrierBetween>

function carryCount(draft: Draft, count: Count, carry: Carrier, origin: number): void {
  const carried = Array.from(count.layers.position, carry)
  const lost = carried.filter(({ reached }) => !reached).length
  if (lost > 0) {
    const message =
      `the new path does not reach ${lost} of the ${carried.length} boundaries of ${count.id}; ` +
      'let it begin above and end below them'
    throw new Fault('conflict', 'points', lost, message)
  }
  const rows = carried.map((_, i) => i).filter((i) => carried[i].position !== count.layers.position[i])
  if (rows.length > 0) {
    const ids = rows.map((i) => count.layers.id[i])
    draft.add(
      moveLayers(
        count,
        ids,
        rows.map((i) => carried[i].position),
        origin,
      ),
    )
  }
  draft.add(setChecked(count, carry(count.checkedTo).position))
}

function carrySpansAndNotes(draft: Draft, transect: string, carry: Carrier): void {
  for (const span of draft.project.spans) {
    if (span.transect !== transect) continue
    const from = carry(span.from)
    const to = carry(span.to)
    // An edge beyond the path is drawn in to its end; a span wholly beyond it has no place left.
    if (!from.reached && !to.reached && from.position === to.position) {
      const message = `the new path does not reach the span ${span.id}; let it pass there, or remove the span first`
      throw new Fault('conflict', 'points', span.id, message)
    }
    draft.add(changeRecord(draft.project, 'spans', span.id, { from: from.position, to: to.position }))
  }
  for (const note of draft.project.notes) {
    if (note.transect !== transect) continue
    draft.add(changeRecord(draft.project, 'notes', note.id, { position: carry(note.position).position }))
  }
}
