import { spanName, spanTexture } from '../strip/spans.ts'
import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { drawAxes } from './axes.ts'
import type { PlotArea } from './axes.ts'
import { yearAxis } from './calendars.ts'
import type { AgeDepthData, Band, DatedLevel, DepthSpan } from './data.ts'
import { decimate, extent, scaled } from './decimate.ts'
import { drawSurroundings } from './legend.ts'
import type { LegendItem } from './legend.ts'
import { placeNames } from './names.ts'
import { seriesStyle } from './series.ts'

/** Height of the hill that shows a date's distribution, surface units. */
const hill = 15

/** Age against depth, depth running down as in the core: the central line in its bands, counts and dates beside it. */
export const paintAgeDepth: Painter<AgeDepthData> = (surface, frame, data, theme) => {
  const rest = drawSurroundings(surface, frame, legend(data, theme), data.caption, theme)
  const [least, most] = yearExtent(data)
  const [top, base] = depthExtent(data)
  const divisor = data.depthUnit === 'cm' ? 10 : 1
  const area = drawAxes(
    surface,
    rest,
    yearAxis(data.calendar, least, most, data.older),
    { title: 'Depth', unit: data.depthUnit, start: top / divisor, end: base / divisor },
    theme,
  )
  const plot: PlotArea = { ...area, y: (mm) => area.y(mm / divisor) }
  surface.clip(plot.inner, () => {
    paintDepthSpans(surface, plot, data.spans, theme)
    if (data.band95) surface.group('95 % band', () => paintBand(surface, plot, data, data.band95!, theme.bandWide))
    if (data.band68) surface.group('68 % band', () => paintBand(surface, plot, data, data.band68!, theme.bandNarrow))
    data.counters.forEach((counter, k) => {
      const line = decimate(scaled(counter.depth, plot.y), scaled(counter.years, plot.x), 1, false)
      surface.group(`counter ${counter.name}`, () => surface.polyline(line, counterStroke(k, theme)))
    })
    const central = decimate(scaled(data.depth, plot.y), scaled(data.central, plot.x), 1, false)
    surface.group('central', () => surface.polyline(central, { colour: theme.ink, width: theme.stroke.strong }))
  })
  surface.group('dates', () => paintDates(surface, plot, data.dates, theme))
}

/** Counters' own lines never look like the central one: thinner, and the first of them dashed too. */
function counterStroke(k: number, theme: Theme) {
  return { ...seriesStyle(k + 1, theme).stroke, colour: theme.quiet, width: theme.stroke.thin }
}

function legend(data: AgeDepthData, theme: Theme): LegendItem[] {
  const items: LegendItem[] = [
    {
      name: data.centralName,
      sample: { kind: 'line', stroke: { colour: theme.ink, width: theme.stroke.strong } },
    },
  ]
  if (data.band68) items.push({ name: '68 %', sample: { kind: 'area', fill: theme.bandNarrow } })
  if (data.band95) items.push({ name: '95 %', sample: { kind: 'area', fill: theme.bandWide } })
  data.counters.forEach(({ name }, k) =>
    items.push({ name, sample: { kind: 'line', stroke: counterStroke(k, theme) } }),
  )
  for (const kind of ['event', 'unreadable', 'hiatus'] as const) {
    if (data.spans.some((span) => span.kind === kind)) {
      items.push({ name: spanName[kind], sample: { kind: 'texture', texture: spanTexture[kind], colour: theme.faint } })
    }
  }
  return items
}

function yearExtent(data: AgeDepthData): [number, number] {
  const dated = data.dates.flatMap(({ years, density }) => {
    const most = extent(density)?.[1] ?? 0
    // The far tails of a date would squeeze the rest of the plot; they are cut off at a fiftieth of its peak.
    return Array.from(years).filter((_, i) => years.length === 1 || density[i] > most / 50)
  })
  const { central, band68, band95, counters } = data
  const found = extent(
    central,
    band68?.low,
    band68?.high,
    band95?.low,
    band95?.high,
    dated,
    ...counters.map((c) => c.years),
  )
  if (!found) return [0, 1]
  const margin = (found[1] - found[0]) * 0.03 || 1
  return [found[0] - (found[0] === 0 ? 0 : margin), found[1] + margin]
}

function depthExtent(data: AgeDepthData): [number, number] {
  const ends = data.spans.flatMap(({ from, to }) => [from, to])
  const dated = data.dates.flatMap(({ depthFrom, depthTo }) => [depthFrom, depthTo])
  const found = extent(data.depth, ends, dated, ...data.counters.map((c) => c.depth))
  if (!found) return [0, 1]
  // A core that begins near the sediment surface is drawn from the surface.
  const top = found[0] < (found[1] - found[0]) / 5 ? Math.min(0, found[0]) : found[0]
  return [top, found[1] > top ? found[1] : top + 1]
}

/** Spans as textured stripes across a plot whose depth runs down. */
export function paintDepthSpans(surface: Surface, plot: PlotArea, spans: readonly DepthSpan[], theme: Theme): void {
  for (const { from, to, kind } of spans) {
    const y = plot.y(from)
    const height = Math.max(1, plot.y(to) - y)
    surface.texture({ ...plot.inner, y, height }, spanTexture[kind], theme.hairline)
  }
}

function paintBand(surface: Surface, plot: PlotArea, data: AgeDepthData, band: Band, fill: string): void {
  const depth = scaled(data.depth, plot.y)
  const low = decimate(depth, scaled(band.low, plot.x), 1, false)
  const high = decimate(depth, scaled(band.high, plot.x), 1, false)
  const outline = low.filter((_, i) => !Number.isNaN(low[i - (i % 2)]))
  for (let i = high.length - 2; i >= 0; i -= 2) if (!Number.isNaN(high[i])) outline.push(high[i], high[i + 1])
  if (outline.length >= 6) surface.polygon(outline, { fill })
}

function paintDates(surface: Surface, plot: PlotArea, dates: readonly DatedLevel[], theme: Theme): void {
  const names: { text: string; box: Frame }[] = []
  for (const date of dates) {
    const y = plot.y((date.depthFrom + date.depthTo) / 2)
    const [left, right] =
      date.years.length === 1 ? paintKnown(surface, plot, date, y, theme) : paintHill(surface, plot, date, y, theme)
    names.push({ text: date.id, box: { x: left, y: y - hill / 2, width: right - left, height: hill / 2 } })
  }
  placeNames(surface, plot.inner, names, theme)
}

/** A level whose year is known: a diamond, as high as the sample is thick. */
function paintKnown(surface: Surface, plot: PlotArea, date: DatedLevel, y: number, theme: Theme): [number, number] {
  const x = plot.x(date.years[0])
  const stroke = { colour: theme.ink, width: theme.stroke.thin }
  surface.line(x, plot.y(date.depthFrom), x, plot.y(date.depthTo), stroke)
  surface.marker('diamond', x, y, 8, { fill: date.doubtful ? theme.ground : theme.ink, stroke })
  return [x - 5, x + 5]
}

/** A date with an error: its distribution as a hill that stands on the sample's depth; hollow where it is doubted. */
function paintHill(surface: Surface, plot: PlotArea, date: DatedLevel, y: number, theme: Theme): [number, number] {
  const most = extent(date.density)?.[1] ?? 0
  if (!(most > 0)) return [plot.inner.x, plot.inner.x]
  const outline: number[] = []
  for (let i = 0; i < date.years.length; i++) {
    if (date.density[i] > most / 1000) outline.push(plot.x(date.years[i]), y - (date.density[i] / most) * hill)
  }
  const [left, right] = extent(outline.filter((_, i) => i % 2 === 0)) ?? [plot.inner.x, plot.inner.x]
  const from = outline[0] <= outline[outline.length - 2] ? [left, right] : [right, left]
  const closed = [from[0], y, ...outline, from[1], y]
  const edge = { colour: theme.ink, width: theme.stroke.hair, dash: date.doubtful ? [2, 2] : undefined }
  surface.clip(plot.inner, () => {
    surface.polygon(closed, { fill: date.doubtful ? undefined : theme.faint, opacity: 0.55, stroke: edge })
  })
  return [Math.max(plot.inner.x, left), Math.min(plot.inner.x + plot.inner.width, right)]
}
