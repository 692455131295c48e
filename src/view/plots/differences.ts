import { formatNumber, decimalsFor } from '../numbers.ts'
import type { Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { placeLabels } from '../ticks.ts'
import { drawAxes } from './axes.ts'
import type { PlotArea } from './axes.ts'
import type { DifferencesData } from './data.ts'
import { decimate, extent, scaled } from './decimate.ts'
import { drawSurroundings } from './legend.ts'
import type { LegendItem } from './legend.ts'
import { markedVertices, seriesStyle } from './series.ts'

/** Each counter's cumulative count minus the mean of all counters, down the core: where the counts part, the lines part. */
export const paintDifferences: Painter<DifferencesData> = (surface, frame, data, theme) => {
  const rest = drawSurroundings(surface, frame, legend(data, theme), data.caption, theme)
  const found = extent(...data.counters.map((counter) => counter.difference), data.band?.low, data.band?.high)
  // Symmetrical about zero, so that more and fewer years weigh the same to the eye.
  const reach = Math.max(1, -(found?.[0] ?? 0), found?.[1] ?? 0) * 1.08
  const horizons = data.horizons.map(({ depth }) => depth)
  const [top, base] = extent(...data.counters.map((counter) => counter.depth), data.band?.depth, horizons) ?? [0, 1]
  const divisor = data.depthUnit === 'cm' ? 10 : 1
  const start = top < (base - top) / 5 ? Math.min(0, top) : top
  const area = drawAxes(
    surface,
    rest,
    { title: 'Count minus mean of counts', unit: 'a', start: -reach, end: reach, text: signed },
    { title: 'Depth', unit: data.depthUnit, start: start / divisor, end: Math.max(base, start + 1) / divisor },
    theme,
  )
  const plot: PlotArea = { ...area, y: (mm) => area.y(mm / divisor) }
  surface.clip(plot.inner, () => {
    if (data.band) paintBand(surface, plot, data.band, theme)
    const zero = plot.x(0)
    surface.line(zero, plot.inner.y, zero, plot.inner.y + plot.inner.height, {
      colour: theme.faint,
      width: theme.stroke.hair,
    })
    data.counters.forEach(({ name, depth, difference }, k) => {
      const line = decimate(scaled(depth, plot.y), scaled(difference, plot.x), 1, false)
      const { stroke, shape, paint } = seriesStyle(k, theme)
      surface.group(`counter ${name}`, () => {
        surface.polyline(line, stroke)
        for (const [x, y] of markedVertices(line, k, data.counters.length)) surface.marker(shape, x, y, 6, paint)
      })
    })
  })
  paintHorizons(surface, plot, data, theme)
}

/** A difference carries its sign both ways. */
function signed(value: number, step: number): string {
  return `${value > 0 ? '+' : ''}${formatNumber(value, decimalsFor(step))}`
}

function legend(data: DifferencesData, theme: Theme): LegendItem[] {
  const items: LegendItem[] = data.counters.map(({ name }, k) => ({
    name,
    sample: { kind: 'series', ...seriesStyle(k, theme) },
  }))
  if (data.band) items.push({ name: data.band.name, sample: { kind: 'area', fill: theme.bandWide } })
  return items
}

function paintBand(surface: Surface, plot: PlotArea, band: NonNullable<DifferencesData['band']>, theme: Theme): void {
  const depth = scaled(band.depth, plot.y)
  const outline = decimate(depth, scaled(band.low, plot.x), 1, false)
  const high = decimate(depth, scaled(band.high, plot.x), 1, false)
  for (let i = high.length - 2; i >= 0; i -= 2) outline.push(high[i], high[i + 1])
  if (outline.length >= 6) surface.polygon(outline, { fill: theme.bandWide })
}

/** Horizons between which counts are compared: broken rules with their names, as far as the names find room. */
function paintHorizons(surface: Surface, plot: PlotArea, data: DifferencesData, theme: Theme): void {
  const { inner } = plot
  const size = theme.size.small
  const places = data.horizons.map(({ depth, name }) => ({ name, at: plot.y(depth), room: size * 1.3, weight: 0 }))
  for (const { at } of places) {
    surface.line(inner.x, at, inner.x + inner.width, at, {
      colour: theme.faint,
      width: theme.stroke.hair,
      dash: [2, 3],
    })
  }
  for (const k of placeLabels(places)) {
    const above = places[k].at - inner.y > size * 1.4
    surface.text(places[k].name, inner.x + inner.width - 2, places[k].at + (above ? -2 : 2), {
      size,
      colour: theme.quiet,
      anchor: 'end',
      baseline: above ? 'bottom' : 'top',
      halo: theme.ground,
    })
  }
}
