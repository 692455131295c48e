import type { Reader } from './form.ts'
import type { Project } from './project.ts'

/** What every kind of edit can do; steps.ts puts the kinds together. A step is plain JSON and is never changed. */
export interface StepKind<Step> {
  /** The project after the step. Throws a Fault when what the step says was there is not there. */
  apply(project: Project, step: Step): Project
  /** The step that takes this one back; needs no document. */
  invert(step: Step): Step
  /** One step that does what `first` and then `second` do; null when there is none. */
  merge(first: Step, second: Step): Step | null
  /** Checks a step that came as JSON. */
  read: Reader<Step>
}
