import type { Outcome } from '../document/outcome.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { decideCandidates } from './decideCandidates.ts'
import type { CandidateChoice } from './decideCandidates.ts'

/** Remembers candidates as looked at and found to be no boundaries; see decideCandidates.ts for what is left out. */
export function rejectCandidates(state: WorkbenchState, choice: CandidateChoice): Outcome<Edit> {
  return decideCandidates('reject', state, choice, 'rejected')
}
