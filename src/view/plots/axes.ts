import { scaleLinear } from 'd3-scale'
import { withUnit } from '../labels.ts'
import { decimalsFor, formatNumber } from '../numbers.ts'
import type { Frame, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { placeLabels, roundness } from '../ticks.ts'

/** What an axis shows. `start` is the value at its left or upper end, so that a depth axis runs down and a year axis either way. */
export interface AxisSpec {
  title: string
  unit: string | null
  start: number
  end: number
  /** Values to be marked, about so many of them; by default round ones. */
  ticks?: (least: number, most: number, count: number) => number[]
  /** How a value is written; `step` is the distance of two marks. */
  text?: (value: number, step: number) => string
}

export interface PlotArea {
  inner: Frame
  x: (value: number) => number
  y: (value: number) => number
}

interface AxisTick {
  at: number
  text: string
}

const markLength = 4
const gap = 4

/**
 * Draws both axes in a frame, as wide and high as their labels need, and returns what is left inside. Labels never touch:
 * the number of marks follows the room, and where two would still meet, the rounder one stays.
 * A plot of columns has no x axis.
 */
export function drawAxes(
  surface: Surface,
  frame: Frame,
  xAxis: AxisSpec | null,
  yAxis: AxisSpec,
  theme: Theme,
): PlotArea {
  const { small, text } = theme.size
  const height = frame.height - (xAxis ? small + markLength + gap + text * 1.8 : small)
  const y = scaleLinear()
    .domain([yAxis.start, yAxis.end])
    .range([0, Math.max(1, height)])
  const yTicks = ticksOf(yAxis, y, height / (small * 3), () => small * 1.5)
  const widest = Math.max(0, ...yTicks.map((tick) => surface.measure(tick.text, small)))
  const left = Math.ceil(text * 1.7 + widest + gap + markLength)
  const width = Math.max(1, frame.width - left - small)
  const x = scaleLinear()
    .domain([xAxis?.start ?? 0, xAxis?.end ?? 1])
    .range([0, width])
  const labelWidth = (label: string) => surface.measure(label, small) + small
  const xTicks = xAxis ? ticksOf(xAxis, x, width / (small * 5), labelWidth) : []
  const inner: Frame = { x: frame.x + left, y: frame.y, width, height: Math.max(1, height) }
  surface.group('axes', () => {
    drawLeft(surface, frame, inner, yAxis, yTicks, theme)
    if (xAxis) drawBottom(surface, inner, xAxis, keptInside(xTicks, inner, frame, surface, small), theme)
  })
  return { inner, x: (value) => inner.x + x(value), y: (value) => inner.y + y(value) }
}

type Scale = (value: number) => number

function ticksOf(axis: AxisSpec, scale: Scale, count: number, room: (text: string) => number): AxisTick[] {
  const [least, most] = [Math.min(axis.start, axis.end), Math.max(axis.start, axis.end)]
  const wanted = Math.max(2, Math.floor(count))
  const values = axis.ticks ? axis.ticks(least, most, wanted) : scaleLinear().domain([least, most]).ticks(wanted)
  const step = values.length > 1 ? Math.abs(values[1] - values[0]) : Math.abs(values[0] ?? 1) || 1
  const text = axis.text ?? ((value: number, of: number) => formatNumber(value, decimalsFor(of)))
  const ticks = values.map((value) => ({ at: scale(value), text: text(value, step), weight: roundness(value / step) }))
  const wishes = ticks.map((tick) => ({ at: tick.at, room: room(tick.text), weight: tick.weight }))
  return placeLabels(wishes).map((k) => ticks[k])
}

/** Labels that would reach beyond the frame are moved inwards by leaving them out: a cut number reads as another one. */
function keptInside(ticks: AxisTick[], inner: Frame, frame: Frame, surface: Surface, size: number): AxisTick[] {
  return ticks.filter((tick) => {
    const half = surface.measure(tick.text, size) / 2
    return inner.x + tick.at + half <= frame.x + frame.width && inner.x + tick.at - half >= frame.x
  })
}

function drawLeft(surface: Surface, frame: Frame, inner: Frame, axis: AxisSpec, ticks: AxisTick[], theme: Theme): void {
  const { small, text } = theme.size
  surface.line(inner.x, inner.y, inner.x, inner.y + inner.height, { colour: theme.ink, width: theme.stroke.hair })
  surface.lines(
    ticks.flatMap(({ at }) => [inner.x - markLength, inner.y + at, inner.x, inner.y + at]),
    { colour: theme.ink, width: theme.stroke.hair },
  )
  for (const tick of ticks) {
    surface.text(tick.text, inner.x - markLength - gap, inner.y + tick.at, {
      size: small,
      colour: theme.ink,
      anchor: 'end',
      baseline: 'middle',
    })
  }
  surface.text(withUnit(axis.title, axis.unit, text, theme.quiet), frame.x + text * 0.9, inner.y + inner.height / 2, {
    size: text,
    colour: theme.ink,
    anchor: 'middle',
    rotation: -90,
  })
}

function drawBottom(surface: Surface, inner: Frame, axis: AxisSpec, ticks: AxisTick[], theme: Theme): void {
  const { small, text } = theme.size
  const base = inner.y + inner.height
  surface.line(inner.x, base, inner.x + inner.width, base, { colour: theme.ink, width: theme.stroke.hair })
  surface.lines(
    ticks.flatMap(({ at }) => [inner.x + at, base, inner.x + at, base + markLength]),
    { colour: theme.ink, width: theme.stroke.hair },
  )
  for (const tick of ticks) {
    surface.text(tick.text, inner.x + tick.at, base + markLength + gap * 0.5, {
      size: small,
      colour: theme.ink,
      anchor: 'middle',
      baseline: 'top',
    })
  }
  surface.text(
    withUnit(axis.title, axis.unit, text, theme.quiet),
    inner.x + inner.width / 2,
    base + markLength + gap + small + text * 1.2,
    { size: text, colour: theme.ink, anchor: 'middle' },
  )
}
