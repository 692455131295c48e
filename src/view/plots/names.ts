import type { Frame, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'

/**
 * Writes names beside things in a plot: to the right, to the left, above or below, wherever no other name and none of the
 * things stands. A name that finds no room anywhere is left out; the table beside the figure holds it.
 */
export function placeNames(
  surface: Surface,
  inner: Frame,
  things: readonly { text: string; box: Frame }[],
  theme: Theme,
): void {
  const size = theme.size.small
  const taken = things.map(({ box }) => box)
  for (const { text, box } of things) {
    const width = surface.measure(text, size)
    const height = size * 1.2
    const middle = box.y + box.height / 2 - height / 2
    const spots = [
      { x: box.x + box.width + 4, y: middle },
      { x: box.x - width - 4, y: middle },
      { x: box.x + box.width + 4, y: middle - height },
      { x: box.x - width - 4, y: middle - height },
      { x: box.x + box.width + 4, y: middle + height },
      { x: box.x - width - 4, y: middle + height },
    ]
    const free = spots
      .map((spot) => ({ ...spot, width, height }))
      .find((spot) => inside(spot, inner) && !taken.some((other) => other !== box && overlap(spot, other)))
    if (!free) continue
    taken.push(free)
    surface.text(text, free.x, free.y + height / 2, {
      size,
      colour: theme.ink,
      baseline: 'middle',
      halo: theme.ground,
    })
  }
}

function inside(box: Frame, outer: Frame): boolean {
  return (
    box.x >= outer.x &&
    box.y >= outer.y &&
    box.x + box.width <= outer.x + outer.width &&
    box.y + box.height <= outer.y + outer.height
  )
}

function overlap(a: Frame, b: Frame): boolean {
  return a.x < b.x + b.width && b.x < a.x + a.width && a.y < b.y + b.height && b.y < a.y + a.height
}
