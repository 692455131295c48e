import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import { removeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { Draft, makeEdit } from './edit.ts'

/** Takes a section away with all that was made on it; undo brings everything back. */
export function removeSection(state: WorkbenchState, { section }: { section: string }): Outcome<Edit> {
  return makeEdit('section.remove', () => {
    needRecord(state.project, 'sections', section)
    const draft = new Draft(state.project)
    for (const transect of state.project.transects) {
      if (transect.section === section) removeWithTransect(draft, transect.id)
    }
    draft.add(removeRecord(draft.project, 'sections', section))
    return draft.steps
  })
}

/** Takes a transect away with the counts, spans and notes on it. */
export function removeTransect(state: WorkbenchState, { transect }: { transect: string }): Outcome<Edit> {
  return makeEdit('transect.remove', () => {
    const draft = new Draft(state.project)
    removeWithTransect(draft, transect)
    return draft.steps
  })
}

function removeWithTransect(draft: Draft, transect: string): void {
  for (const collection of ['counts', 'spans', 'notes'] as const) {
    for (const record of draft.project[collection]) {
      if (record.transect === transect) draft.add(removeRecord(draft.project, collection, record.id))
    }
  }
  draft.add(removeRecord(draft.project, 'transects', transect))
}
