import { Fault } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { placeBoundary } from './placeBoundary.ts'

/** Makes two years of one: a certain boundary inside a layer, path pixels; refused where placeBoundary refuses one. */
export function splitLayer(
  state: WorkbenchState,
  { count, position }: { count: string; position: number },
): Outcome<Edit> {
  const edit = placeBoundary(state, { count, position })
  return edit instanceof Fault ? edit : { ...edit, userEvent: 'split' }
}
