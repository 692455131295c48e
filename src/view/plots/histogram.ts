import type { Painter, Surface } from '../surface.ts'
import { placeLabels } from '../ticks.ts'
import { drawAxes } from './axes.ts'
import type { HistogramData } from './data.ts'
import { extent } from './decimate.ts'
import { drawSurroundings } from './legend.ts'

/** How often values fall into each bin. */
export const paintHistogram: Painter<HistogramData> = (surface, frame, data, theme) => {
  const size = theme.size.small
  const rest = drawSurroundings(surface, frame, [], data.caption, theme)
  const rows = nameRows(surface, data, rest.width, size)
  const heading = rows.length * size * 1.3
  const [least, greatest] = extent(data.edges) ?? [0, 1]
  const most = extent(data.count)?.[1] ?? 1
  const plot = drawAxes(
    surface,
    { ...rest, y: rest.y + heading, height: rest.height - heading },
    { title: data.title, unit: data.unit, start: least, end: greatest > least ? greatest : least + 1 },
    { title: data.countTitle, unit: null, start: most > 0 ? most * 1.05 : 1, end: 0 },
    theme,
  )
  const base = plot.inner.y + plot.inner.height
  surface.group('bins', () => {
    for (let i = 0; i < data.count.length; i++) {
      const x = plot.x(data.edges[i])
      const y = plot.y(data.count[i])
      if (!(data.count[i] > 0)) continue
      surface.rect(
        { x, y, width: plot.x(data.edges[i + 1]) - x + theme.stroke.hair, height: base - y },
        { fill: theme.bandNarrow, stroke: { colour: theme.ink, width: theme.stroke.hair } },
      )
    }
  })
  rows.forEach((marks, row) => {
    const line = plot.inner.y - size * 0.5 - (rows.length - 1 - row) * size * 1.3
    for (const { value, name } of marks) {
      const x = plot.x(value)
      const half = surface.measure(name, size) / 2
      const at = Math.min(frame.x + frame.width - half, Math.max(frame.x + half, x))
      surface.line(x, line + 3, x, base, { colour: theme.ink, width: theme.stroke.thin, dash: [4, 3] })
      surface.text(name, at, line, { size, colour: theme.ink, anchor: 'middle', halo: theme.ground })
    }
  })
}

/** Names of the values pointed out, one row above another where they would touch. */
function nameRows(surface: Surface, data: HistogramData, width: number, size: number): HistogramData['marks'][] {
  const [least, most] = extent(data.edges) ?? [0, 1]
  const rows: HistogramData['marks'][] = []
  let left = [...data.marks]
  while (left.length > 0) {
    // The axis takes up to a fifth of the width; what stands apart on four fifths of it stands apart.
    const wishes = left.map(({ value, name }) => ({
      at: (value / Math.max(1e-12, most - least)) * width * 0.8,
      room: surface.measure(name, size) + size,
      weight: 0,
    }))
    const granted = placeLabels(wishes)
    rows.unshift(granted.map((k) => left[k]))
    left = left.filter((_, k) => !granted.includes(k))
  }
  return rows
}
