import { checkFinite } from '../../worker/check.ts'
import type { Millimetres } from '../../worker/units.ts'
import type { Outcome } from '../document/outcome.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Sets the depth of a section's young end below the sediment surface. */
export function setDepth(
  state: WorkbenchState,
  { section, depthTop }: { section: string; depthTop: Millimetres },
): Outcome<Edit> {
  return makeEdit('depth', () => {
    checkFinite('depth of the top in mm', depthTop)
    return [changeRecord(state.project, 'sections', section, { depthTop })]
  })
}
