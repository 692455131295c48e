import { Fault } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import type { Edit } from '../document/transaction.ts'

/** Edits made from the same state as one: the first says what was done; the first Fault stands for all. */
export function joined(outcomes: readonly (Outcome<Edit> | null)[]): Outcome<Edit> | null {
  const present = outcomes.filter((outcome) => outcome !== null)
  const fault = present.find((outcome) => outcome instanceof Fault)
  if (fault) return fault
  const edits = present.filter((outcome): outcome is Edit => !(outcome instanceof Fault))
  return edits.length === 0 ? null : { ...edits[0], steps: edits.flatMap(({ steps }) => steps) }
}
