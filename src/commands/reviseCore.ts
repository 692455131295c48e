import type { Outcome } from '../document/outcome.ts'
import type { Core } from '../document/project.ts'
import { changeCore } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'

/** Sets what is known of the core: its name, lake, coring year, and whether its top is intact. */
export function reviseCore(state: WorkbenchState, fields: Partial<Core>): Outcome<Edit> {
  return makeEdit('core', () => [changeCore(state.project, fields)])
}
