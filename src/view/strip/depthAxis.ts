import { decimalsFor, formatNumber } from '../numbers.ts'
import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { minorStep, multiples, niceStep } from '../ticks.ts'
import type { Tick } from '../ticks.ts'
import { toScreen, visibleRange } from '../viewport.ts'
import type { DepthAxisData } from './data.ts'

/** Least distance of two labels, CSS pixels: three lines of type, so that the axis stays quiet. */
const leastRoom = 42
/** Least distance of two unlabelled marks. */
const leastMinor = 5

export type DepthUnit = 'mm' | 'cm' | 'px'

export interface DepthTicks {
  unit: DepthUnit
  /** Depth units from one label to the next. */
  step: number
  major: Tick[]
  /** Places of the unlabelled marks, CSS pixels. */
  minor: number[]
}

/** The marks of the depth axis for what is on screen: round steps, millimetres close up and centimetres from afar. */
export function depthTicks(data: Pick<DepthAxisData, 'viewport' | 'mmPerPx' | 'depthTop'>): DepthTicks {
  const { viewport, mmPerPx, depthTop } = data
  const known = mmPerPx !== null && mmPerPx > 0
  const mm = known ? mmPerPx : 1
  const top = known ? depthTop : 0
  const coarse = known && niceStep((leastRoom / viewport.scale) * mm) >= 10
  const divisor = coarse ? 10 : 1
  const unit: DepthUnit = !known ? 'px' : coarse ? 'cm' : 'mm'
  /** Depth units per axis pixel, and depth in those units at axis pixel 0. */
  const perPx = mm / divisor
  const start = top / divisor
  const step = Math.max(niceStep((leastRoom / viewport.scale) * perPx), known ? 0 : 1)
  const [from, to] = visibleRange(viewport)
  const first = start + Math.max(0, from) * perPx
  const last = start + Math.min(viewport.length, to) * perPx
  const place = (depth: number) => toScreen(viewport, (depth - start) / perPx)
  const decimals = decimalsFor(step)
  const small = minorStep(step, (leastMinor / viewport.scale) * perPx)
  return {
    unit,
    step,
    major: multiples(step, first, last).map((value) => ({
      value,
      at: place(value),
      text: formatNumber(value, decimals),
    })),
    minor: small === null ? [] : multiples(small, first, last).map(place),
  }
}

/** Depth under the pointer in the axis's unit, one figure finer than its unlabelled marks. */
export function depthText(data: Pick<DepthAxisData, 'viewport' | 'mmPerPx' | 'depthTop'>, axis: number): string {
  const { unit, step } = depthTicks(data)
  const { mmPerPx, depthTop } = data
  if (unit === 'px' || mmPerPx === null) return formatNumber(axis, step >= 10 ? 0 : 1)
  const mm = depthTop + axis * mmPerPx
  return formatNumber(unit === 'cm' ? mm / 10 : mm, decimalsFor(step / 100))
}

/** The depth axis, its rule along the right edge of the frame. */
export const paintDepthAxis: Painter<DepthAxisData> = (surface, frame, data, theme) => {
  const ticks = depthTicks(data)
  // The rule itself lies inside the frame, on its last whole pixel.
  const right = frame.x + frame.width - theme.stroke.hair / 2
  const { viewport } = data
  const top = frame.y + Math.max(0, toScreen(viewport, 0))
  const bottom = frame.y + Math.min(frame.height, toScreen(viewport, viewport.length))
  surface.line(right, top, right, bottom, { colour: theme.faint, width: theme.stroke.hair })
  surface.lines(
    ticks.minor.flatMap((at) => [right - 3, frame.y + at, right, frame.y + at]),
    { colour: theme.faint, width: theme.stroke.hair },
  )
  surface.lines(
    ticks.major.flatMap(({ at }) => [right - 7, frame.y + at, right, frame.y + at]),
    { colour: theme.ink, width: theme.stroke.hair },
  )
  const half = theme.size.small * 0.62
  for (const { at, text } of ticks.major) {
    // A label cut by the edge of the view would read as another number.
    if (at < half || at > frame.height - half) continue
    surface.text(text, right - 11, frame.y + at, {
      size: theme.size.small,
      colour: theme.quiet,
      anchor: 'end',
      baseline: 'middle',
    })
  }
  if (typeof data.pointer === 'number') paintPointer(surface, frame, data, data.pointer, theme)
}

/** The depth under the pointer, in a plain tag over the axis. */
function paintPointer(surface: Surface, frame: Frame, data: DepthAxisData, axis: number, theme: Theme): void {
  const right = frame.x + frame.width
  const y = toScreen(data.viewport, axis)
  if (y < 0 || y > frame.height || axis < 0 || axis > data.viewport.length) return
  const size = theme.size.small
  const middle = frame.y + Math.min(frame.height - size * 0.8, Math.max(size * 0.8, y))
  const text = depthText(data, axis)
  const width = surface.measure(text, size) + 8
  surface.rect(
    { x: right - 7 - width, y: middle - size * 0.8, width, height: size * 1.6 },
    { fill: theme.ground, stroke: { colour: theme.ink, width: theme.stroke.hair } },
  )
  surface.line(right - 7, frame.y + y, right, frame.y + y, { colour: theme.ink, width: theme.stroke.hair })
  surface.text(text, right - 11, middle, { size, colour: theme.ink, anchor: 'end', baseline: 'middle' })
}
