import { placeLabels, roundness } from '../ticks.ts'
import type { Wish } from '../ticks.ts'
import { toScreen } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import { inView } from './columns.ts'

export interface YearNumber {
  /** Index of the boundary. */
  index: number
  /** CSS pixels below the top of the view. */
  y: number
  year: number
}

/**
 * Year numbers that can stand beside their boundaries without touching. Round years go first, and marks just out of view
 * take part, so that numbers neither jump nor swap while the core scrolls. `first` (the cursor's boundary) is always there.
 */
export function yearNumbers(
  view: Viewport,
  position: Float64Array,
  years: Float64Array,
  room: number,
  first: number | null,
): YearNumber[] {
  const [from, to] = inView(view, position, 4 * room)
  const least = leastStep(view, to - from, room)
  const wishes: Wish[] = []
  const index: number[] = []
  for (let i = from; i < to; i++) {
    const year = years[i]
    if (Number.isNaN(year)) continue
    // Most numbers of a dense ladder cannot stand anyway; leaving them out beforehand keeps a frame short.
    if (i !== first && (Math.round(year) !== year || year % least !== 0)) continue
    wishes.push({ at: toScreen(view, position[i]), room, weight: i === first ? 100 : roundness(year) })
    index.push(i)
  }
  return placeLabels(wishes)
    .map((k) => ({ index: index[k], y: wishes[k].at, year: years[index[k]] }))
    .filter(({ y }) => y >= room / 2 && y <= view.height - room / 2)
}

/** Least round step of years that leaves about enough room for every number in view; half of it may still fit in thick layers. */
function leastStep(view: Viewport, marks: number, room: number): number {
  const wanted = (marks * room) / (view.height + 8 * room) / 4
  for (const step of [1, 2, 5, 10, 20, 50, 100, 500, 1000]) if (step >= wanted) return step
  return 5000
}
