import type { Recipe } from '../../worker/core/recipe.ts'
import type { ScanInfo } from '../../worker/reading/scanFile.ts'
import { calYear, millimetres, pathPixels } from '../../worker/units.ts'
import { Fault } from '../../worker/check.ts'
import type { DemoCount, DemoDate, DemoFacts } from '../document/demoFacts.ts'
import { layersFromColumns } from '../document/layerSet.ts'
import { need } from '../document/outcome.ts'
import type { Outcome } from '../document/outcome.ts'
import { freshId } from '../document/project.ts'
import type { CoreDate, ScanReference } from '../document/project.ts'
import { addRecord, changeCore, changeRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { counterNamed } from './addCounter.ts'
import { addSection } from './addSection.ts'
import { Draft, makeEdit } from './edit.ts'
import { nextPass } from './startCount.ts'

/** Fills a new project with the demo core: its section, spans, three counts and dates. Refused in a project with sections. */
export function loadDemo(
  state: WorkbenchState,
  { facts, scan, recipe }: { facts: DemoFacts; scan: Pick<ScanInfo, keyof ScanReference>; recipe: Recipe },
): Outcome<Edit> {
  return makeEdit('demo', () => {
    if (state.project.sections.length > 0) {
      const message = 'the demo needs a new project; this one already has sections'
      throw new Fault('conflict', 'sections', state.project.sections.length, message)
    }
    const draft = new Draft(state.project)
    const transect = addDemoSection(draft, state, { facts, scan, recipe })
    for (const span of facts.spans) {
      draft.add(addRecord(draft.project, 'spans', { id: freshId(draft.project, 'spans'), transect, ...span }))
    }
    for (const count of facts.counts) addDemoCount(draft, transect, count, state.version + 1)
    for (const date of facts.dates) draft.add(addRecord(draft.project, 'dates', dateOf(date)))
    return draft.steps
  })
}

/** Adds core and section; returns the id of the transect. */
function addDemoSection(
  draft: Draft,
  state: WorkbenchState,
  { facts, scan, recipe }: { facts: DemoFacts; scan: Pick<ScanInfo, keyof ScanReference>; recipe: Recipe },
): string {
  const { name, orientation, mmPerPx, depthTop, transect } = facts.section
  const id = freshId(draft.project, 'transects')
  draft.add(changeCore(draft.project, { ...facts.core, coringYear: calYear(facts.core.coringYear) }))
  const section = need(
    addSection(state, {
      scan,
      recipe,
      name,
      orientation,
      depthTop: millimetres(depthTop),
      scale: { mmPerPx, basis: 'file' },
    }),
  )
  for (const step of section.steps) draft.add(step)
  draft.add(changeRecord(draft.project, 'transects', id, transect))
  return id
}

function addDemoCount(
  draft: Draft,
  transect: string,
  { counter: name, position, mark }: DemoCount,
  origin: number,
): void {
  const { counter, added } = counterNamed(draft.project, name)
  draft.add(added)
  const layers = layersFromColumns({
    id: position.map((_, i) => i + 1),
    position,
    mark,
    origin: position.map(() => origin),
  })
  const count = nextPass(draft.project, transect, counter.id, true)
  draft.add(addRecord(draft.project, 'counts', { ...count, checkedTo: pathPixels(position.at(-1) ?? 0), layers }))
}

function dateOf({ id, kind, topMm, baseMm, value, sigma, note }: DemoDate): CoreDate {
  return {
    id,
    kind,
    label: `${id}, ${note}`,
    top: millimetres(topMm),
    base: millimetres(baseMm),
    value,
    sigma,
    offset: 0,
    offsetSigma: 0,
    use: true,
  }
}
