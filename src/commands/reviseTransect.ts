import { checkTransect } from '../../worker/core/transect.ts'
import type { Transect } from '../../worker/core/transect.ts'
import type { ScanPixels } from '../../worker/units.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Sets the width over which the profile is averaged, scan pixels. */
export function setTransectWidth(
  state: WorkbenchState,
  { transect, width }: { transect: string; width: ScanPixels },
): Outcome<Edit> {
  return reviseTransect('transect.width', state, transect, { width })
}

/** Sets the bedding tilt in radians; null: estimated from the image. */
export function setTilt(
  state: WorkbenchState,
  { transect, tilt }: { transect: string; tilt: number | null },
): Outcome<Edit> {
  return reviseTransect('transect.tilt', state, transect, { tilt })
}

/** Sets the polygons whose inside is left out of the profile. */
export function setMasks(
  state: WorkbenchState,
  { transect, masks }: { transect: string; masks: Transect['masks'] },
): Outcome<Edit> {
  return reviseTransect('transect.mask', state, transect, { masks })
}

function reviseTransect(
  userEvent: string,
  state: WorkbenchState,
  id: string,
  fields: Partial<Omit<Transect, 'points'>>,
): Outcome<Edit> {
  return makeEdit(userEvent, () => {
    const transect = needRecord(state.project, 'transects', id)
    checkTransect(needRecord(state.project, 'sections', transect.section).scan, { ...transect, ...fields })
    return [changeRecord(state.project, 'transects', id, fields)]
  })
}
