import type { MarkerShape, Paint, Stroke } from '../surface.ts'
import type { Theme } from '../theme.ts'

const dashes: readonly (readonly number[] | undefined)[] = [
  undefined,
  [6, 3],
  [1.5, 2.5],
  [8, 3, 1.5, 3],
  [3, 3],
  [10, 2],
]
const shapes: readonly MarkerShape[] = ['circle', 'square', 'triangle', 'diamond', 'cross', 'plus']

/** How the k-th of several lines is drawn: they differ in dash and marker, so that they need no colour. */
export function seriesStyle(k: number, theme: Theme): { stroke: Stroke; shape: MarkerShape; paint: Paint } {
  const dash = dashes[k % dashes.length]
  const colour = k < dashes.length ? theme.ink : theme.faint
  return {
    stroke: { colour, width: theme.stroke.thin, dash },
    shape: shapes[k % shapes.length],
    // Filled and open in turn: the step from one line to the next shows even where a photocopy has eaten the dashes.
    paint: { fill: k % 2 === 0 ? colour : theme.ground, stroke: { colour, width: theme.stroke.thin } },
  }
}

/** Vertices of a line (x, y in turn) at which a marker is set: about one each `distance` down the plot, lines out of step. */
export function markedVertices(line: readonly number[], k: number, of: number, distance = 70): [number, number][] {
  const marked: [number, number][] = []
  let next = line.length > 1 ? line[1] + (distance * (k + 0.5)) / Math.max(1, of) : Infinity
  for (let i = 0; i + 1 < line.length; i += 2) {
    if (Number.isNaN(line[i]) || line[i + 1] < next) continue
    marked.push([line[i], line[i + 1]])
    next = Math.max(next + distance, line[i + 1])
  }
  return marked
}
