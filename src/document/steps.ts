/**
 * The kinds of edit. A step is a small plain object that can go to JSON as it is; it names layers and records by stable id
 * and holds what was there before and after, so it inverts without the document and replay checks itself.
 *
 * Exports: `Step`, `applyStep(project, step)`, `applySteps(project, steps)` (a Fault is a value: the project is not what
 * the step starts from), `invertStep(step)`, `invertSteps(steps)`, `mergeSteps(first, second)`, `mergeAll(steps)`,
 * `readStep` (from JSON). Makers of steps: recordSteps.ts and layerSteps.ts.
 */
import { oneOf } from './form.ts'
import type { Reader } from './form.ts'
import { checkKind, liftKind, markKind, moveKind, placeKind } from './layerSteps.ts'
import type { CheckStep, LiftStep, MarkStep, MoveStep, PlaceStep } from './layerSteps.ts'
import { attempt } from './outcome.ts'
import type { Outcome } from './outcome.ts'
import type { Project } from './project.ts'
import { addKind, changeKind, coreKind, removeKind } from './recordSteps.ts'
import type { AddStep, ChangeStep, CoreStep, RemoveStep } from './recordSteps.ts'
import type { StepKind } from './stepKind.ts'

export type Step = CoreStep | AddStep | RemoveStep | ChangeStep | PlaceStep | LiftStep | MoveStep | MarkStep | CheckStep

export const stepKinds = ['core', 'add', 'remove', 'change', 'place', 'lift', 'move', 'mark', 'check'] as const

const kinds = {
  core: coreKind,
  add: addKind,
  remove: removeKind,
  change: changeKind,
  place: placeKind,
  lift: liftKind,
  move: moveKind,
  mark: markKind,
  check: checkKind,
}

function kindOf(step: Step): StepKind<Step> {
  return kinds[step.kind]
}

/** The project after the step, or the Fault that says why it does not apply. */
export function applyStep(project: Project, step: Step): Outcome<Project> {
  return attempt(() => kindOf(step).apply(project, step))
}

/** The project after all steps, or the Fault of the first that does not apply. */
export function applySteps(project: Project, steps: readonly Step[]): Outcome<Project> {
  return attempt(() => steps.reduce((before, step) => kindOf(step).apply(before, step), project))
}

export function invertStep(step: Step): Step {
  return kindOf(step).invert(step)
}

/** The steps that take these back, last first. */
export function invertSteps(steps: readonly Step[]): Step[] {
  return steps.map(invertStep).reverse()
}

/** One step for two of the same kind on the same thing; null when they are not one. */
export function mergeSteps(first: Step, second: Step): Step | null {
  return first.kind === second.kind ? kindOf(first).merge(first, second) : null
}

/** The same edits in as few steps as neighbours merge into. */
export function mergeAll(steps: readonly Step[]): Step[] {
  const merged: Step[] = []
  for (const step of steps) {
    const last = merged.at(-1)
    const joined = last ? mergeSteps(last, step) : null
    if (joined) merged[merged.length - 1] = joined
    else merged.push(step)
  }
  return merged
}

/** Checks a step that came as JSON; throws a Fault naming what is wrong where. */
export const readStep: Reader<Step> = (value, at) => {
  const kind = oneOf(...stepKinds)((value as { kind?: unknown } | null)?.kind, `${at}.kind`)
  return (kinds[kind] as unknown as StepKind<Step>).read(value, at)
}
