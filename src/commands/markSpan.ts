import { Fault } from '../../worker/check.ts'
import { range } from '../document/layerSet.ts'
import { liftLayers } from '../document/layerSteps.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId, needRecord } from '../document/project.ts'
import type { Count, Project, SectionSpan } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { LiftStep } from '../document/layerSteps.ts'
import type { Edit } from '../document/transaction.ts'
import { checkOnPath, describePlace, makeEdit } from './edit.ts'
import { nameOfSpan } from './roomForBoundaries.ts'

/**
 * Sets an event bed, an unreadable span or a hiatus apart, path pixels. The boundaries of `count` inside it are lifted in
 * the same act; those of other counts stay, as what their counters saw, and are left out of the reckoning (counted.ts).
 * Refused where it overlaps another span. The new span's id is `freshId(project, 'spans')` of the state before.
 */
export function markSpan(
  state: WorkbenchState,
  span: Omit<SectionSpan, 'id' | 'note'> & { note?: string; count?: string },
): Outcome<Edit> {
  return makeEdit('span', () => {
    const { transect, kind, from, to, note = '', count } = span
    checkSpanPlace(state.project, { id: '', transect, kind, from, to, note })
    const id = freshId(state.project, 'spans')
    return [
      count === undefined ? null : liftInside(needRecord(state.project, 'counts', count), span),
      addRecord(state.project, 'spans', { id, transect, from, to, kind, note }),
    ]
  })
}

/** Lifts the boundaries of a count strictly inside a span; null when there are none. */
export function liftInside(count: Count, { transect, from, to }: Pick<SectionSpan, 'transect' | 'from' | 'to'>) {
  if (count.transect !== transect) {
    throw new Fault('argument', 'count', count.id, `${count.id} was made on another transect than this span`)
  }
  const [start, end] = range(count.layers, from, to)
  const inside = Array.from(count.layers.id.subarray(start, end)).filter(
    (_, i) => count.layers.position[start + i] > from,
  )
  return inside.length > 0 ? (liftLayers(count, inside) satisfies LiftStep) : null
}

/** Throws a Fault unless the span lies on its transect, the right way round and clear of the other spans. */
export function checkSpanPlace(project: Project, span: SectionSpan): void {
  const { id, transect, from, to, kind } = span
  checkOnPath(project, transect, 'from', from)
  checkOnPath(project, transect, 'to', to)
  if (kind === 'hiatus' ? !(to >= from) : !(to > from)) {
    const message = `${nameOfSpan(kind)} must end below its top, ${describePlace(from)}; it ends at ${describePlace(to)}`
    throw new Fault('argument', 'to', to, message)
  }
  const other = project.spans.find(
    (there) => there.transect === transect && there.id !== id && there.from < to && from < there.to,
  )
  if (!other) return
  const message =
    `${describePlace(from)} to ${describePlace(to)} overlaps ${nameOfSpan(other.kind)} ` +
    `(${describePlace(other.from)} to ${describePlace(other.to)}); change that one or stay clear of it`
  throw new Fault('conflict', 'span', other.id, message)
}
