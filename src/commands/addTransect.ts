import { checkTransect } from '../../worker/core/transect.ts'
import type { Transect } from '../../worker/core/transect.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId, needRecord } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Draws another transect on a section, from young to old. Its id is `freshId(project, 'transects')` of the state before. */
export function addTransect(
  state: WorkbenchState,
  { section, points, width, tilt, masks }: { section: string } & Transect,
): Outcome<Edit> {
  return makeEdit('transect', () => {
    const transect = { id: freshId(state.project, 'transects'), section, points, width, tilt, masks }
    checkTransect(needRecord(state.project, 'sections', section).scan, transect)
    return [addRecord(state.project, 'transects', transect)]
  })
}
