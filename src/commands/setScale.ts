import { checkPositive } from '../../worker/check.ts'
import type { Outcome } from '../document/outcome.ts'
import type { Scale } from '../document/project.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Sets the scale of a section, mm per scan pixel, and where it came from. */
export function setScale(
  state: WorkbenchState,
  { section, mmPerPx, basis }: { section: string } & Scale,
): Outcome<Edit> {
  return makeEdit('scale', () => {
    checkPositive('scale in mm per pixel', mmPerPx)
    return [changeRecord(state.project, 'sections', section, { scale: { mmPerPx, basis } })]
  })
}
