import type { Frame, Painter, Stroke, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { acrossToScreen } from '../tiles.ts'
import { bandEdges } from '../transectShape.ts'
import { toScreen } from '../viewport.ts'
import type { TransectData, TransectHandle } from './data.ts'

/** Diameter of a handle, CSS pixels. */
export const handleSize = 9

interface ScreenPoint {
  x: number
  y: number
}

/** The transect on the sediment: its two edges as hairlines, its path and handles only while it is being edited. */
export const paintTransect: Painter<TransectData> = (surface, frame, data, theme) => {
  const place = placer(frame, data)
  const edges = bandEdges(data.transect)
  const left = edges.left.map(place)
  const right = edges.right.map(place)
  const path = data.transect.points.map(place)
  surface.clip(frame, () => {
    surface.group('transect', () => {
      for (const side of ['left', 'right'] as const) {
        const active = data.active?.kind === 'edge' && data.active.side === side
        casedLine(
          surface,
          visiblePart(side === 'left' ? left : right, frame),
          theme,
          active,
          data.editable ? 0.95 : 0.6,
        )
      }
      if (data.editable) {
        casedLine(surface, visiblePart(path, frame), theme, data.active?.kind === 'segment', 0.55)
        paintHandles(surface, frame, data.active, path, { left, right }, theme)
      }
    })
  })
}

/** From upright core pixels to the surface. */
export function placer(frame: Frame, data: Pick<TransectData, 'viewport' | 'across'>) {
  return (point: { axis: number; across: number }): ScreenPoint => ({
    x: frame.x + acrossToScreen(data.across, frame.width, point.across),
    y: frame.y + toScreen(data.viewport, point.axis),
  })
}

/** A line that stays visible over sediment of any brightness: light, with a dark edge on either side. */
function casedLine(surface: Surface, points: number[], theme: Theme, active: boolean, opacity: number): void {
  const casing: Stroke = { colour: theme.overScan.casing, width: 3, opacity: 0.35 * opacity }
  surface.polyline(points, casing)
  surface.polyline(points, { colour: active ? theme.overScan.accent : theme.overScan.line, width: 1, opacity })
}

/** A circle at every point of the path; a square on either edge of each part, in the middle of what can be seen of it. */
function paintHandles(
  surface: Surface,
  frame: Frame,
  active: TransectHandle | null,
  path: ScreenPoint[],
  edges: Record<'left' | 'right', ScreenPoint[]>,
  theme: Theme,
): void {
  const handle = (shape: 'circle' | 'square', x: number, y: number, held: boolean) =>
    surface.marker(shape, x, y, handleSize, {
      fill: held ? theme.overScan.accent : theme.overScan.line,
      stroke: { colour: theme.overScan.casing, width: 1 },
    })
  for (const side of ['left', 'right'] as const) {
    for (let index = 0; index + 1 < edges[side].length; index++) {
      const part = visiblePart(edges[side].slice(index, index + 2), frame)
      if (part.length === 0) continue
      const [x1, y1, x2, y2] = part
      handle('square', (x1 + x2) / 2, (y1 + y2) / 2, isActive(active, { kind: 'edge', side, index }))
    }
  }
  path.forEach(({ x, y }, index) => handle('circle', x, y, isActive(active, { kind: 'point', index })))
}

function isActive(active: TransectHandle | null, handle: TransectHandle): boolean {
  if (active?.kind !== handle.kind || active.index !== handle.index) return false
  return active.kind !== 'edge' || handle.kind !== 'edge' || active.side === handle.side
}

/**
 * The part of a line that can be seen, x and y in turn: a magnified transect is hundreds of thousands of pixels long, and a
 * canvas slows down with what lies outside of it.
 */
export function visiblePart(points: readonly ScreenPoint[], frame: Frame): number[] {
  const least = frame.y - 8
  const most = frame.y + frame.height + 8
  const result: number[] = []
  for (let i = 0; i + 1 < points.length; i++) {
    const [a, b] = [points[i], points[i + 1]]
    if (Math.max(a.y, b.y) < least || Math.min(a.y, b.y) > most) continue
    const from = cut(a, b, least, most)
    const to = cut(b, a, least, most)
    result.push(from.x, from.y, to.x, to.y, NaN, NaN)
  }
  return result
}

/** Point `a`, moved along the line to `b` until it lies between two heights. */
function cut(a: ScreenPoint, b: ScreenPoint, least: number, most: number): ScreenPoint {
  const y = Math.min(most, Math.max(least, a.y))
  return y === a.y || a.y === b.y ? a : { x: a.x + ((y - a.y) / (b.y - a.y)) * (b.x - a.x), y }
}
