import { Fault } from '../../worker/check.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import { defaultTransect } from '../../worker/core/transect.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { Project } from '../document/project.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/**
 * Says which way the core lies in its scan. Transects of the section that are still bare are laid anew down the middle.
 * Refused once something was marked along one of them: the edge that ends a year would be the wrong one.
 */
export function setOrientation(
  state: WorkbenchState,
  { section: id, orientation }: { section: string; orientation: Orientation },
): Outcome<Edit> {
  return makeEdit('orientation', () => {
    const { project } = state
    const section = needRecord(project, 'sections', id)
    const step = changeRecord(project, 'sections', id, { orientation })
    if (!step) return []
    const transects = project.transects.filter((transect) => transect.section === id)
    for (const transect of transects) checkBare(project, transect.id)
    const { points, width } = defaultTransect(section.scan, orientation)
    return [step, ...transects.map((transect) => changeRecord(project, 'transects', transect.id, { points, width }))]
  })
}

function checkBare(project: Project, transect: string): void {
  const count = project.counts.find((one) => one.transect === transect && one.layers.id.length > 0)
  const span = project.spans.find((one) => one.transect === transect)
  if (!count && !span) return
  const what = count ? `${count.layers.id.length} boundaries of ${count.id}` : 'a span'
  const message =
    `the orientation must be set before counting; this section already has ${what}. ` +
    'Add the scan again as a new section, turned as it should be'
  throw new Fault('conflict', 'orientation', transect, message)
}
