import type { Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { drawAxes } from './axes.ts'
import type { PlotArea } from './axes.ts'
import { yearAxis } from './calendars.ts'
import type { ThicknessData } from './data.ts'
import { decimate, extent, scaled } from './decimate.ts'
import { drawSurroundings } from './legend.ts'
import type { LegendItem } from './legend.ts'

/** A bar for each layer as long as it has at least this much room, surface units; a line otherwise. */
const leastBar = 3

/** Thickness, or any other value that belongs to one layer, year by year, with its running mean. */
export const paintThickness: Painter<ThicknessData> = (surface, frame, data, theme) => {
  const name = data.title ?? 'Varve thickness'
  const rest = drawSurroundings(surface, frame, legend(data, name, theme), data.caption, theme)
  const [first, last] = extent(data.year) ?? [0, 1]
  const most = extent(data.thickness, data.band?.high, data.mean)?.[1] ?? 1
  const plot = drawAxes(
    surface,
    rest,
    yearAxis(data.calendar, first - 0.5, last + 0.5, data.older),
    { title: name, unit: data.unit ?? 'mm', start: most > 0 ? most * 1.05 : 1, end: 0 },
    theme,
  )
  surface.clip(plot.inner, () => {
    if (data.band) paintBand(surface, plot, data, data.band, theme)
    const room = plot.inner.width / Math.max(1, last - first + 1)
    surface.group('layers', () => {
      if (room >= leastBar) paintBars(surface, plot, data, theme)
      else paintLine(surface, plot, data, data.thickness, { colour: theme.faint, width: theme.stroke.hair })
    })
    if (data.mean) {
      const { mean } = data
      const stroke = { colour: theme.ink, width: theme.stroke.strong }
      surface.group('running mean', () => paintLine(surface, plot, data, mean, stroke))
    }
  })
}

function legend(data: ThicknessData, name: string, theme: Theme): LegendItem[] {
  const items: LegendItem[] = [
    { name: `${name} per year`, sample: { kind: 'line', stroke: { colour: theme.faint, width: theme.stroke.thin } } },
  ]
  if (data.mean) {
    const stroke = { colour: theme.ink, width: theme.stroke.strong }
    items.push({ name: `mean of ${data.meanYears} years`, sample: { kind: 'line', stroke } })
  }
  if (data.band) items.push({ name: '95 %', sample: { kind: 'area', fill: theme.bandWide } })
  return items
}

function paintBars(surface: Surface, plot: PlotArea, data: ThicknessData, theme: Theme): void {
  const base = plot.inner.y + plot.inner.height
  for (let i = 0; i < data.year.length; i++) {
    if (Number.isNaN(data.thickness[i])) continue
    const [a, b] = [plot.x(data.year[i] - 0.5), plot.x(data.year[i] + 0.5)]
    const y = plot.y(data.thickness[i])
    // The light gap between bars is what makes single years countable on paper.
    surface.rect(
      { x: Math.min(a, b) + 0.5, y, width: Math.max(1, Math.abs(b - a) - 1), height: base - y },
      { fill: theme.faint },
    )
  }
}

function paintLine(
  surface: Surface,
  plot: PlotArea,
  data: ThicknessData,
  value: Float64Array,
  stroke: { colour: string; width: number },
): void {
  surface.polyline(decimate(scaled(data.year, plot.x), scaled(value, plot.y), 0.75, true), stroke)
}

function paintBand(
  surface: Surface,
  plot: PlotArea,
  data: ThicknessData,
  band: NonNullable<ThicknessData['band']>,
  theme: Theme,
): void {
  const x = scaled(data.year, plot.x)
  // A year without a value ends the band and begins a new one: it must not be bridged.
  let start = 0
  for (let i = 0; i <= x.length; i++) {
    if (i < x.length && !Number.isNaN(band.low[i]) && !Number.isNaN(band.high[i])) continue
    if (i - start >= 2) {
      const part = x.subarray(start, i)
      const low = decimate(part, scaled(band.low.subarray(start, i), plot.y), 0.75, true)
      const high = decimate(part, scaled(band.high.subarray(start, i), plot.y), 0.75, true)
      const outline = [...low]
      for (let k = high.length - 2; k >= 0; k -= 2) outline.push(high[k], high[k + 1])
      surface.polygon(outline, { fill: theme.bandWide })
    }
    start = i + 1
  }
}
