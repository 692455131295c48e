import type { Recipe } from '../../worker/core/recipe.ts'
import type { Outcome } from '../document/outcome.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Sets the detection parameters of a section. */
export function reviseRecipe(
  state: WorkbenchState,
  { section, recipe }: { section: string; recipe: Recipe },
): Outcome<Edit> {
  return makeEdit('recipe', () => [changeRecord(state.project, 'sections', section, { recipe })])
}
