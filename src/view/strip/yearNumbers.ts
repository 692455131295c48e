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

const steps = [1, 2, 5, 10, 20, 50, 100, 200, 500, 1000, 2000, 5000]
/** Share of the numbers of a step that must find room, or else a wider step reads better. */
const enough = 0.8

/**
 * Year numbers that can stand beside their boundaries without touching: every year, or every second, fifth, tenth …; where
 * even these meet, the rounder one stays. Marks just out of view take part, so that numbers neither jump nor swap while the
 * core scrolls. `first` (the cursor's boundary) is always there.
 */
export function yearNumbers(
  view: Viewport,
  position: Float64Array,
  years: Float64Array,
  room: number,
  first: number,
): YearNumber[] {
  const [from, to] = inView(view, position, 4 * room)
  const most = (view.height + 8 * room) / room
  for (const step of steps) {
    // Far more numbers than there is room for need not be tried.
    if ((to - from) / step > 2 * most && step < 5000) continue
    const wishes = wishesFor(step, view, position, years, { from, to, room, first })
    const granted = placeLabels(wishes)
    if (granted.length < enough * wishes.length && step < 5000) continue
    return granted
      .map((k) => ({ index: wishes[k].index, y: wishes[k].at, year: years[wishes[k].index] }))
      .filter(({ y }) => y >= room / 2 && y <= view.height - room / 2)
  }
  return []
}

function wishesFor(
  step: number,
  view: Viewport,
  position: Float64Array,
  years: Float64Array,
  { from, to, room, first }: { from: number; to: number; room: number; first: number },
): (Wish & { index: number })[] {
  const wishes: (Wish & { index: number })[] = []
  for (let index = from; index < to; index++) {
    const year = years[index]
    if (Number.isNaN(year) || (index !== first && year % step !== 0)) continue
    wishes.push({ index, at: toScreen(view, position[index]), room, weight: index === first ? 100 : roundness(year) })
  }
  return wishes
}
