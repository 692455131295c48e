/**
 * Failure as a value. A command or an edit that the person at the bench can meet in normal work answers with a Fault
 * instead of throwing, so that no caller forgets it; misuse by the program itself still throws.
 *
 * Exports: `Outcome<T>`, `attempt(action)`, `failed(outcome)`.
 */
import { Fault } from '../../worker/check.ts'

export type Outcome<T> = T | Fault

/** Runs an action that reports by throwing Faults (the checks of worker/check.ts do) and returns the Fault as a value. */
export function attempt<T>(action: () => T): Outcome<T> {
  try {
    return action()
  } catch (error) {
    if (error instanceof Fault) return error
    throw error
  }
}

export function failed<T>(outcome: Outcome<T>): outcome is Fault {
  return outcome instanceof Fault
}

/** The value of an outcome; throws its Fault. */
export function need<T>(outcome: Outcome<T>): T {
  if (outcome instanceof Fault) throw outcome
  return outcome
}
