import { Fault } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId } from '../document/project.ts'
import type { Counter, Project } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { AddStep } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Adds a counter. Refused without a name or with that of another. */
export function addCounter(state: WorkbenchState, { name }: { name: string }): Outcome<Edit> {
  return makeEdit('counter', () => {
    const { counter, added } = counterNamed(state.project, name)
    if (added) return [added]
    throw new Fault('conflict', 'name', name, `there is already a counter "${counter.name}"; choose another name`)
  })
}

/** The counter of this name, with the step that adds it where the project has none. Throws a Fault without a name. */
export function counterNamed(project: Project, name: string): { counter: Counter; added: AddStep | null } {
  const trimmed = name.trim()
  if (trimmed === '') throw new Fault('argument', 'name', name, 'a counter must have a name; it is empty')
  const known = project.counters.find((counter) => counter.name === trimmed)
  if (known) return { counter: known, added: null }
  const counter: Counter = { id: freshId(project, 'counters'), name: trimmed }
  return { counter, added: addRecord(project, 'counters', counter) }
}
