/**
 * Where a count has room for boundaries; shared by the commands that place and move them.
 *
 * Exports: `rejectedWithin(layers, position)`, `checkFree(layers, position)`, `spanAt(project, transect, position)`,
 * `checkOutsideSpans(project, transect, position)`, `newBoundaries(layers, positions, mark, origin)`.
 */
import { Fault } from '../../worker/check.ts'
import { lowerBound, markAt, minimalGap, nextLayerId } from '../document/layerSet.ts'
import type { LayerColumns, LayerSet, Mark } from '../document/layerSet.ts'
import type { Project, SectionSpan } from '../document/project.ts'
import { describePlace } from './edit.ts'

/** Indices of the boundaries too near to `position` for another one. */
function crowding(layers: LayerSet, position: number): number[] {
  const found: number[] = []
  // One below the gap may still be too near by a rounding of the subtraction: test as the layer set does.
  for (let i = Math.max(0, lowerBound(layers, position) - 2); i < layers.position.length; i++) {
    if (layers.position[i] - position >= minimalGap) break
    if (!(position - layers.position[i] >= minimalGap)) found.push(i)
  }
  return found
}

/** Ids of the rejected proposals that a boundary here would lie on; they give way to it. */
export function rejectedWithin(layers: LayerSet, position: number): number[] {
  return crowding(layers, position)
    .filter((index) => markAt(layers, index) === 'rejected')
    .map((index) => layers.id[index])
}

/** Throws a Fault when a boundary that counts already lies here. */
export function checkFree(layers: LayerSet, position: number): void {
  for (const index of crowding(layers, position)) {
    if (markAt(layers, index) === 'rejected') continue
    const there = describePlace(layers.position[index])
    const message = `there is already a boundary at ${there}; move or remove that one instead of setting another on it`
    throw new Fault('conflict', 'position', position, message)
  }
}

const spanNames = { event: 'an event bed', unreadable: 'an unreadable span', hiatus: 'a hiatus' }

/** What a kind of span is called in a message. */
export function nameOfSpan(kind: SectionSpan['kind']): string {
  return spanNames[kind]
}

/** The span that holds this position in its inside; its edges are free for boundaries. */
export function spanAt(project: Project, transect: string, position: number): SectionSpan | undefined {
  return project.spans.find((span) => span.transect === transect && span.from < position && position < span.to)
}

export function checkOutsideSpans(project: Project, transect: string, position: number): void {
  const span = spanAt(project, transect, position)
  if (!span) return
  const message =
    `${describePlace(position)} lies in ${nameOfSpan(span.kind)} (${describePlace(span.from)} to ${describePlace(span.to)}), ` +
    'which holds no countable years; remove or shorten that first'
  throw new Fault('conflict', 'position', position, message)
}

/** Columns of new boundaries with ids of their own. */
export function newBoundaries(
  layers: LayerSet,
  positions: readonly number[],
  mark: Mark,
  origin: number,
): LayerColumns {
  const first = nextLayerId(layers)
  return {
    id: positions.map((_, i) => first + i),
    position: positions,
    mark: positions.map(() => mark),
    origin: positions.map(() => origin),
  }
}
