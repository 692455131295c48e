/**
 * Which boundaries of a count go into the reckoning: neither rejected proposals nor what lies inside an event bed,
 * unreadable span or hiatus.
 *
 * Exports: `countedBoundaries(project, count)`.
 */
import { marks } from './layerSet.ts'
import { needRecord } from './project.ts'
import type { Project } from './project.ts'

/** Columns [boundaries], sorted by position. */
export interface CountedBoundaries {
  id: Uint32Array
  /** Path pixels. */
  position: Float64Array
  /** 1 where the counter was in doubt. */
  doubtful: Uint8Array
}

/** Throws a Fault when the project has no such count. */
export function countedBoundaries(project: Project, countId: string): CountedBoundaries {
  const { transect, layers } = needRecord(project, 'counts', countId)
  const spans = project.spans.filter((span) => span.transect === transect).sort((a, b) => a.from - b.from)
  const rejected = marks.indexOf('rejected')
  const kept: number[] = []
  let next = 0
  layers.position.forEach((position, i) => {
    while (next < spans.length && spans[next].to <= position) next++
    const inside = next < spans.length && spans[next].from < position
    if (layers.mark[i] !== rejected && !inside) kept.push(i)
  })
  const doubtful = marks.indexOf('doubtful')
  return {
    id: Uint32Array.from(kept, (i) => layers.id[i]),
    position: Float64Array.from(kept, (i) => layers.position[i]),
    doubtful: Uint8Array.from(kept, (i) => (layers.mark[i] === doubtful ? 1 : 0)),
  }
}
