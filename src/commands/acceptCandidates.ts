import type { Mark } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { decideCandidates } from './decideCandidates.ts'
import type { CandidateChoice } from './decideCandidates.ts'

/** Takes candidates as boundaries, many at once; see decideCandidates.ts for what is left out. */
export function acceptCandidates(
  state: WorkbenchState,
  { mark = 'certain', ...choice }: CandidateChoice & { mark?: Exclude<Mark, 'rejected'> },
): Outcome<Edit> {
  return decideCandidates('accept', state, choice, mark)
}
