/**
 * What every command shares. A command is a pure function (state, arguments) -> Edit or Fault; the session turns the edit
 * into a transaction. An edit without steps means that everything is already as asked: there is nothing to dispatch.
 *
 * Exports: `makeEdit(userEvent, action, cause?)`, `Draft` (steps that build on one another), `pathOf(project, transect)`, `checkOnPath(project, transect, field, position)`,
 * `describePlace(position)`.
 */
import { checkFinite, Fault } from '../../worker/check.ts'
import { pathLength } from '../../worker/core/transect.ts'
import { attempt, need } from '../document/outcome.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { Project } from '../document/project.ts'
import { applyStep } from '../document/steps.ts'
import type { Step } from '../document/steps.ts'
import type { Cause, Edit } from '../document/transaction.ts'

/** Collects steps, leaving out those that would change nothing (null); a Fault thrown on the way becomes the answer. */
export function makeEdit(userEvent: string, action: () => readonly (Step | null)[], cause?: Cause): Outcome<Edit> {
  return attempt(() => ({
    userEvent,
    steps: action().filter((step) => step !== null),
    ...(cause && { cause }),
  }))
}

/** Path pixels as they stand in a message. */
export function describePlace(position: number): string {
  return `${position.toFixed(1)} px`
}

/** Throws a Fault unless the position lies on the transect. */
export function checkOnPath(project: Project, transectId: string, field: string, position: number): void {
  const length = pathLength(needRecord(project, 'transects', transectId).points)
  checkFinite(field, position)
  if (position >= 0 && position <= length) return
  const message = `${field} must lie on the transect, 0 to ${describePlace(length)}; it is ${describePlace(position)}`
  throw new Fault('argument', field, position, message)
}

/** Collects steps of which later ones build on what earlier ones did. */
export class Draft {
  /** The project after the steps so far. */
  project: Project
  readonly steps: Step[] = []

  constructor(project: Project) {
    this.project = project
  }

  /** Adds a step; null, which would change nothing, is left out. */
  add(step: Step | null): void {
    if (!step) return
    this.project = need(applyStep(this.project, step))
    this.steps.push(step)
  }
}
