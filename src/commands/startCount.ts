import { Fault } from '../../worker/check.ts'
import { pathPixels } from '../../worker/units.ts'
import { emptyLayers } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId, needRecord } from '../document/project.ts'
import type { Count, Project } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { counterNamed } from './addCounter.ts'
import { Draft, makeEdit } from './edit.ts'

/**
 * Starts a count: the next pass of a counter, known or new, over a transect. Unless said otherwise it is blind (earlier
 * counts hidden) when there are earlier ones. The new count's id is `freshId(project, 'counts')` of the state before.
 */
export function startCount(
  state: WorkbenchState,
  { transect, counterName, blind }: { transect: string; counterName: string; blind?: boolean },
): Outcome<Edit> {
  return makeEdit('count', () => {
    needRecord(state.project, 'transects', transect)
    const draft = new Draft(state.project)
    const { counter, added } = counterNamed(state.project, counterName)
    draft.add(added)
    const earlier = state.project.counts.some((count) => count.transect === transect)
    const count = nextPass(draft.project, transect, counter.id, blind ?? earlier)
    draft.add(addRecord(draft.project, 'counts', count))
    return draft.steps
  })
}

/** An empty count: the counter's next pass over the transect. Throws a Fault after the thousandth. */
export function nextPass(project: Project, transect: string, counter: string, blind: boolean): Count {
  const passes = project.counts.filter((count) => count.transect === transect && count.counter === counter)
  const pass = 1 + Math.max(0, ...passes.map((count) => count.pass))
  if (pass > 1000) throw new Fault('too-large', 'pass', pass, 'a counter may pass over a transect at most 1000 times')
  return {
    id: freshId(project, 'counts'),
    transect,
    counter,
    pass,
    blind,
    checkedTo: pathPixels(0),
    layers: emptyLayers,
  }
}
