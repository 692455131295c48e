/**
 * The project as it was, and what has changed in a count since.
 *
 * Exports: `projectAt(state, seq)`, `LayerChanges`, `compareLayers(then, now)`.
 */
import { Fault } from '../../worker/check.ts'
import type { LayerSet } from './layerSet.ts'
import type { Outcome } from './outcome.ts'
import type { Project } from './project.ts'
import type { WorkbenchState } from './state.ts'
import { applySteps, invertSteps } from './steps.ts'

/** The project after edit `seq`: every later edit taken back. A Fault where the journal does not reach back so far. */
export function projectAt({ project, version, journal }: WorkbenchState, seq: number): Outcome<Project> {
  if (!Number.isInteger(seq) || seq < journal.since || seq > version) {
    const message = `the history holds edits ${journal.since} to ${version}; there is no edit ${seq} to go back to`
    return new Fault('argument', 'seq', seq, message)
  }
  let then: Outcome<Project> = project
  for (let at = version; at > seq; at--) {
    const transaction = journal.at(at)
    if (!transaction) return new Fault('conflict', 'seq', at, `edit ${at} is missing from the history`)
    then = applySteps(then, invertSteps(transaction.steps))
    if (then instanceof Fault) return then
  }
  return then
}

/** How one count differs between two moments; positions in path pixels, ascending. */
export interface LayerChanges {
  /** Boundaries that are there now only, and those that were there then only. */
  added: number[]
  removed: number[]
  /** Present positions of boundaries that were moved, and of those that bear another mark. */
  moved: number[]
  marked: number[]
}

export function compareLayers(then: LayerSet, now: LayerSet): LayerChanges {
  const before = new Map<number, number>()
  then.id.forEach((id, index) => before.set(id, index))
  const changes: LayerChanges = { added: [], removed: [], moved: [], marked: [] }
  now.id.forEach((id, index) => {
    const position = now.position[index]
    const earlier = before.get(id)
    before.delete(id)
    if (earlier === undefined) {
      changes.added.push(position)
      return
    }
    if (then.position[earlier] !== position) changes.moved.push(position)
    if (then.mark[earlier] !== now.mark[index]) changes.marked.push(position)
  })
  changes.removed = Array.from(before.values(), (index) => then.position[index]).sort((a, b) => a - b)
  return changes
}
