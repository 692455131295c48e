import { Fault } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { markBoundaries } from './markBoundaries.ts'

/**
 * Makes one year of the two on either side of a boundary. The boundary is remembered as rejected, so that it is not
 * proposed again.
 */
export function joinLayers(
  state: WorkbenchState,
  { count, boundary }: { count: string; boundary: number },
): Outcome<Edit> {
  const edit = markBoundaries(state, { count, ids: [boundary], mark: 'rejected' })
  return edit instanceof Fault ? edit : { ...edit, userEvent: 'join' }
}
