/**
 * An agreed count: what several counters settle on after setting their counts side by side.
 *
 * Exports: `agreedName` (the counter it is kept under), `beginAgreed(state, sites)`, `settleSite(state, decision)`.
 */
import { Fault } from '../../worker/check.ts'
import { pathPixels } from '../../worker/units.ts'
import { emptyLayers } from '../document/layerSet.ts'
import type { Mark } from '../document/layerSet.ts'
import { markLayers, placeLayers } from '../document/layerSteps.ts'
import { need } from '../document/outcome.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { place } from '../document/layerSet.ts'
import { counterNamed } from './addCounter.ts'
import { Draft, makeEdit } from './edit.ts'
import { addNote } from './reviseNote.ts'
import { checkFree, newBoundaries, spanAt } from './roomForBoundaries.ts'
import { nextPass } from './startCount.ts'

/** The counter under whose name agreed counts are kept; no count of a person's own. */
export const agreedName = 'Agreed'

/** A site on which all counts agree, path pixels. */
export interface AgreedSite {
  position: number
  mark: Exclude<Mark, 'rejected'>
}

/** Begins the agreed count of a transect with the sites on which all counts agree; those inside spans are left out. */
export function beginAgreed(
  state: WorkbenchState,
  { transect, sites }: { transect: string; sites: readonly AgreedSite[] },
): Outcome<Edit> {
  return makeEdit('agree', () => {
    const draft = new Draft(state.project)
    const { counter, added } = counterNamed(state.project, agreedName)
    draft.add(added)
    const open = sites
      .filter(({ position }) => !spanAt(state.project, transect, position))
      .toSorted((a, b) => a.position - b.position)
    const columns = newBoundaries(
      emptyLayers,
      open.map(({ position }) => position),
      'certain',
      state.version + 1,
    )
    const layers = place(emptyLayers, { ...columns, mark: open.map(({ mark }) => mark) })
    const checkedTo = pathPixels(open.at(-1)?.position ?? 0)
    const count = nextPass(draft.project, transect, counter.id, false)
    draft.add(addRecord(draft.project, 'counts', { ...count, layers, checkedTo }))
    return draft.steps
  })
}

export interface Settlement {
  /** The agreed count. */
  count: string
  /** Path pixels: where the counters differ. */
  position: number
  mark: Mark
  /** Why; kept as a note at the place. */
  reason: string
  /** The boundary of the agreed count that settled this site before; null: it was open. */
  before: number | null
}

const settled: Record<Mark, string> = { certain: 'a year', doubtful: 'doubtful', rejected: 'no year' }

/** Settles one site at which counters differ, with the reason as a note. Refused without a reason. */
export function settleSite(
  state: WorkbenchState,
  { count: countId, position, mark, reason, before }: Settlement,
): Outcome<Edit> {
  return makeEdit('settle', () => {
    const why = reason.trim()
    if (why === '') throw new Fault('argument', 'reason', reason, 'a reason is needed to settle a difference; give one')
    const count = needRecord(state.project, 'counts', countId)
    if (before === null) checkFree(count.layers, position)
    const text = `Settled as ${settled[mark]}: ${why}`
    const note = need(addNote(state, { transect: count.transect, position: pathPixels(position), text }))
    return [
      before === null
        ? placeLayers(count, newBoundaries(count.layers, [position], mark, state.version + 1))
        : markLayers(count, [before], [mark], state.version + 1),
      ...note.steps,
    ]
  })
}
