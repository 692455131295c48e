import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { SectionSpan } from '../document/project.ts'
import { changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { makeEdit } from './edit.ts'
import { checkSpanPlace, liftInside } from './markSpan.ts'

/** Changes the edges, kind or note of a span; the boundaries of `count` that come to lie inside are lifted with it. */
export function changeSpan(
  state: WorkbenchState,
  { span: id, count, ...fields }: { span: string; count?: string } & Partial<Omit<SectionSpan, 'id' | 'transect'>>,
): Outcome<Edit> {
  return makeEdit('span.change', () => {
    const span = { ...needRecord(state.project, 'spans', id), ...fields }
    checkSpanPlace(state.project, span)
    return [
      count === undefined ? null : liftInside(needRecord(state.project, 'counts', count), span),
      changeRecord(state.project, 'spans', id, fields),
    ]
  })
}
