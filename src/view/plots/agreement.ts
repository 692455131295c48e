import { compareLane, paintCompare } from '../strip/compare.ts'
import type { Painter } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { drawAxes } from './axes.ts'
import type { AgreementData } from './data.ts'
import { drawSurroundings } from './legend.ts'
import type { LegendItem } from './legend.ts'

/** The marks of all counters side by side over a stretch of the core, disagreements pointed out; the compare column on paper. */
export const paintAgreement: Painter<AgreementData> = (surface, frame, data, theme) => {
  const rest = drawSurroundings(surface, frame, legend(theme), data.caption, theme)
  const size = theme.size.text
  const below = { ...rest, y: rest.y + size * 1.6, height: rest.height - size * 1.6 }
  const divisor = data.depthUnit === 'cm' ? 10 : 1
  const { inner } = drawAxes(
    surface,
    below,
    null,
    { title: 'Depth', unit: data.depthUnit, start: data.from / divisor, end: data.to / divisor },
    theme,
  )
  const columns = { ...inner, x: inner.x + 6, width: inner.width - 6 }
  data.counters.forEach(({ name }, k) => {
    const lane = compareLane(columns, data.counters.length, k)
    surface.text(name, lane.x + lane.width / 2, inner.y - size * 0.6, {
      size,
      colour: theme.ink,
      anchor: 'middle',
    })
  })
  const span = Math.max(1e-9, data.to - data.from)
  paintCompare(
    surface,
    columns,
    {
      // Depths in millimetres take the place of axis pixels; a view knows no difference.
      viewport: { length: data.to, height: columns.height, top: data.from, scale: columns.height / span },
      counters: data.counters.map(({ name, depth, mark }) => ({ name, column: { position: depth, mark } })),
      sites: data.sites && { position: data.sites.depth, own: data.sites.own, label: data.sites.label },
      cursor: null,
    },
    theme,
  )
}

function legend(theme: Theme): LegendItem[] {
  const thin = { colour: theme.ink, width: theme.stroke.thin }
  const hair = { colour: theme.ink, width: theme.stroke.hair }
  return [
    { name: 'certain', sample: { kind: 'line', stroke: thin } },
    { name: 'doubtful', sample: { kind: 'line', stroke: { ...thin, dash: [7.3, 7.3] } } },
    { name: 'not seen', sample: { kind: 'marker', shape: 'circle', paint: { stroke: hair } } },
    { name: 'seen by some', sample: { kind: 'marker', shape: 'left', paint: { fill: theme.ink } } },
    { name: 'doubted by some', sample: { kind: 'marker', shape: 'left', paint: { stroke: hair } } },
  ]
}
