import { describe, Fault } from '../../worker/check.ts'
import { axisPosition, distanceAtAxis, pathLength } from '../../worker/core/transect.ts'
import { pathPixels } from '../../worker/units.ts'
import { layersFromColumns, minimalGap } from '../document/layerSet.ts'
import type { Mark } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import { needRecord } from '../document/project.ts'
import type { Project } from '../document/project.ts'
import { addRecord } from '../document/recordSteps.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit } from '../document/transaction.ts'
import { counterNamed } from './addCounter.ts'
import { Draft, makeEdit } from './edit.ts'
import { nextPass } from './startCount.ts'

/** One boundary of a count that came as a table. */
export interface CountRow {
  /** Where it stood, for messages: line of the file. */
  line: number
  depthMm: number
  mark: Exclude<Mark, 'rejected'>
}

/**
 * Takes a count made elsewhere as a new pass of a counter, known or new, over a transect. Depths below the sediment surface,
 * ascending; each row that is none, or lies off the transect, or on the row before it, is refused by its line.
 */
export function importCounts(
  state: WorkbenchState,
  { transect, counterName, rows }: { transect: string; counterName: string; rows: readonly CountRow[] },
): Outcome<Edit> {
  return makeEdit('import', () => {
    if (rows.length === 0)
      throw new Fault('argument', 'rows', rows, 'the table of counts has no rows; nothing to take in')
    const position = placeRows(state.project, transect, rows)
    const draft = new Draft(state.project)
    const { counter, added } = counterNamed(state.project, counterName)
    draft.add(added)
    const layers = layersFromColumns({
      id: position.map((_, i) => i + 1),
      position,
      mark: rows.map((row) => row.mark),
      origin: position.map(() => state.version + 1),
    })
    const checkedTo = pathPixels(position[position.length - 1])
    const count = nextPass(draft.project, transect, counter.id, false)
    draft.add(addRecord(draft.project, 'counts', { ...count, layers, checkedTo }))
    return draft.steps
  })
}

/** Path pixels of every row. */
function placeRows(project: Project, transectId: string, rows: readonly CountRow[]): number[] {
  const transect = needRecord(project, 'transects', transectId)
  const { scan, orientation, scale, depthTop, name } = needRecord(project, 'sections', transect.section)
  if (!scale) {
    const message = `section "${name}" has no scale yet; set it before taking in counts by depth`
    throw new Fault('conflict', 'scale', null, message)
  }
  const depthAt = (distance: number) => depthTop + axisPosition(transect, orientation, scan, distance) * scale.mmPerPx
  const length = pathLength(transect.points)
  const reach = { top: depthAt(0), base: depthAt(length) }
  const slack = minimalGap * scale.mmPerPx
  const position: number[] = []
  rows.forEach((row, i) => {
    checkRow(row, rows[i - 1], reach, slack)
    const axis = (row.depthMm - depthTop) / scale.mmPerPx
    position.push(distanceAtAxis(transect, orientation, scan, axis))
    if (i > 0 && !(position[i] - position[i - 1] >= minimalGap)) throw onEachOther(row, rows[i - 1])
  })
  return position
}

function checkRow(
  row: CountRow,
  before: CountRow | undefined,
  reach: { top: number; base: number },
  slack: number,
): void {
  const { line, depthMm } = row
  if (!Number.isFinite(depthMm)) {
    throw new Fault(
      'format',
      'depth_mm',
      depthMm,
      `line ${line}: depth_mm must be a number; it is ${describe(depthMm)}`,
    )
  }
  if (before && depthMm === before.depthMm) throw onEachOther(row, before)
  if (before && depthMm < before.depthMm) {
    const message =
      `line ${line}: depth_mm must grow from row to row; ${depthMm} comes after ${before.depthMm} (line ${before.line}). ` +
      'Sort the table by depth'
    throw new Fault('format', 'depth_mm', depthMm, message)
  }
  if (!(depthMm >= reach.top - slack && depthMm <= reach.base + slack)) {
    const message =
      `line ${line}: depth_mm ${depthMm} is not on the transect, which reaches from ${reach.top.toFixed(1)} ` +
      `to ${reach.base.toFixed(1)} mm; check the depth and scale of the section`
    throw new Fault('format', 'depth_mm', depthMm, message)
  }
}

function onEachOther(row: CountRow, before: CountRow): Fault {
  const message =
    `line ${row.line}: depth_mm ${row.depthMm} is the same place on the scan as ${before.depthMm} (line ${before.line}); ` +
    'leave one of them out'
  return new Fault('format', 'depth_mm', row.depthMm, message)
}
