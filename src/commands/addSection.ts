import { defaultTransect } from '../../worker/core/transect.ts'
import type { Recipe } from '../../worker/core/recipe.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import type { ScanInfo } from '../../worker/reading/scanFile.ts'
import { millimetres } from '../../worker/units.ts'
import type { Millimetres } from '../../worker/units.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId } from '../document/project.ts'
import type { Project, Scale, ScanReference, Section } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { Draft, makeEdit } from './edit.ts'

export interface NewSection {
  scan: Pick<ScanInfo, keyof ScanReference>
  recipe: Recipe
  /** Default: the file's name without its ending. */
  name?: string
  /** Default: along the longer axis, young end low. */
  orientation?: Orientation
  scale?: Scale | null
  /** Default: where the deepest section so far ends. */
  depthTop?: Millimetres
}

/**
 * Adds a section made from a scan, with a transect down its middle. The new ids are `freshId(project, 'sections')` and
 * `freshId(project, 'transects')` of the state before.
 */
export function addSection(state: WorkbenchState, { scan, recipe, ...given }: NewSection): Outcome<Edit> {
  return makeEdit('section', () => {
    const { sha256, name, bytes, width, height, channels, bits } = scan
    const orientation = given.orientation ?? { axis: width > height ? 'x' : 'y', young: 'low' }
    const section: Section = {
      id: freshId(state.project, 'sections'),
      name: given.name ?? (name.replace(/\.[^.]*$/, '').slice(0, 200) || 'Section'),
      scan: { sha256, name, bytes, width, height, channels, bits },
      orientation,
      scale: given.scale ?? null,
      depthTop: given.depthTop ?? deepestBase(state.project),
      recipe,
    }
    const draft = new Draft(state.project)
    draft.add(addRecord(draft.project, 'sections', section))
    draft.add(
      addRecord(draft.project, 'transects', {
        id: freshId(state.project, 'transects'),
        section: section.id,
        ...defaultTransect(scan, orientation),
      }),
    )
    return draft.steps
  })
}

/** Depth at which the deepest section with a scale ends; 0 when there is none. */
function deepestBase(project: Project): Millimetres {
  const bases = project.sections.map(({ scan, orientation, scale, depthTop }) => {
    const length = orientation.axis === 'x' ? scan.width : scan.height
    return depthTop + (scale ? length * scale.mmPerPx : 0)
  })
  return millimetres(Math.max(0, ...bases))
}
