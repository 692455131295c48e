import type { Frame, Painter, Stroke, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { acrossToScreen } from '../tiles.ts'
import { pathAcrossAt } from '../transectShape.ts'
import { toScreen } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import { eachRow, inView } from './columns.ts'
import type { MarkColumn, ScanMarksData } from './data.ts'
import { paintSpans } from './spans.ts'

/** How far marks reach out of the band on either side, CSS pixels. */
const reach = 9

/**
 * Boundaries on the sediment itself: ticks outside of the band on both sides, joined by the faintest of lines, so that the
 * laminae that were counted stay to be seen; only the one being judged is drawn across in the accent. From afar, where
 * marks would cover the sediment, there are none: the ladder beside shows them.
 */
export const paintScanMarks: Painter<ScanMarksData> = (surface, frame, data, theme) => {
  surface.clip(frame, () => {
    const end = ends(frame, data)
    surface.group('spans', () => paintScanSpans(surface, frame, data, theme))
    if (data.proposals && hasRoom(data.viewport, data.proposals.position)) {
      const { position, chosen } = data.proposals
      const dots: number[] = []
      eachRow(data.viewport, position, surface.pixelRatio, (i, y) => {
        if (chosen[i] !== 1) return
        const [x1, y1, x2, y2] = end(position[i], y)
        dots.push(x1 - 6, y1, x1 - 1, y1, x2 + 1, y2, x2 + 6, y2)
      })
      cased(surface, dots, theme, theme.overScan.line, 0.9)
    }
    if (data.boundaries && hasRoom(data.viewport, data.boundaries.position)) {
      paintBoundaries(surface, data, data.boundaries, end, theme)
    }
    if (data.cursor !== null) {
      const [x1, y1, x2, y2] = end(data.cursor, toScreen(data.viewport, data.cursor))
      cased(surface, [x1 - reach - 4, y1, x1, y1, x2, y2, x2 + reach + 4, y2], theme, theme.overScan.accent, 1, 2)
      surface.lines([x1, y1, x2, y2], { colour: theme.overScan.accent, width: theme.stroke.hair, opacity: 0.85 })
    }
  })
}

/** Marks need at least this much room on the sediment, CSS pixels from one to the next. */
const leastRoom = 4

function hasRoom(view: Viewport, position: Float64Array): boolean {
  const [from, to] = inView(view, position)
  return to - from < 2 || (position[to - 1] - position[from]) * view.scale >= leastRoom * (to - from - 1)
}

/**
 * Left and right end of a boundary on the band's edges, sloping with the laminae. Where the band is wider than the column,
 * the ends stay inside the column, so that the ticks beyond them can be seen.
 */
function ends(frame: Frame, data: ScanMarksData) {
  const { viewport, across, transect } = data
  const half = transect.width / 2
  return (axis: number, y: number): [number, number, number, number] => {
    const centre = pathAcrossAt(transect, axis)
    const slope = ((data.slopeAt?.(axis) ?? 0) * viewport.scale) / across.scale
    const middle = acrossToScreen(across, frame.width, centre)
    const left = Math.max(reach + 2, middle - half * across.scale)
    const right = Math.min(frame.width - reach - 2, middle + half * across.scale)
    const at = (x: number): [number, number] => [frame.x + x, frame.y + y + slope * (x - middle)]
    return [...at(left), ...at(right)]
  }
}

function paintBoundaries(
  surface: Surface,
  data: ScanMarksData,
  boundaries: MarkColumn,
  end: ReturnType<typeof ends>,
  theme: Theme,
): void {
  const whole: number[] = []
  const broken: number[] = []
  const crosses: [number, number][] = []
  const joints: number[] = []
  eachRow(data.viewport, boundaries.position, surface.pixelRatio, (i, y) => {
    const [x1, y1, x2, y2] = end(boundaries.position[i], y)
    const mark = boundaries.mark[i]
    if (mark !== 2) joints.push(x1, y1, x2, y2)
    if (mark === 0) whole.push(x1 - reach, y1, x1 - 1, y1, x2 + 1, y2, x2 + reach, y2)
    else if (mark === 1) {
      broken.push(x1 - reach, y1, x1 - reach + 3, y1, x1 - 4, y1, x1 - 1, y1)
      broken.push(x2 + 1, y2, x2 + 4, y2, x2 + reach - 3, y2, x2 + reach, y2)
    } else crosses.push([x1 - 5, y1])
  })
  surface.lines(joints, { colour: theme.overScan.line, width: theme.stroke.hair, opacity: 0.22 })
  cased(surface, whole, theme, theme.overScan.line, 1)
  cased(surface, broken, theme, theme.overScan.line, 1)
  for (const [x, y] of crosses) {
    surface.marker('cross', x, y, 6, { stroke: { colour: theme.overScan.casing, width: 3, opacity: 0.4 } })
    surface.marker('cross', x, y, 6, { stroke: { colour: theme.overScan.line, width: 1 } })
  }
}

/** Light lines on a dark, wider ground: visible on pale silt and on black gyttja alike. */
function cased(surface: Surface, lines: number[], theme: Theme, colour: string, opacity: number, width = 1): void {
  if (lines.length === 0) return
  const casing: Stroke = { colour: theme.overScan.casing, width: width + 2, opacity: 0.45 * opacity }
  surface.lines(lines, casing)
  surface.lines(lines, { colour, width, opacity })
}

/** Spans beside the band only, as textured margins: the sediment inside stays to be seen. */
function paintScanSpans(surface: Surface, frame: Frame, data: ScanMarksData, theme: Theme): void {
  const end = ends(frame, data)
  for (const span of data.spans) {
    const middle = (span.from + span.to) / 2
    const [left, , right] = end(middle, 0)
    for (const x of [left - reach, right]) {
      const margin = { x, y: frame.y, width: reach, height: frame.height }
      paintSpans(surface, margin, data.viewport, [span], theme, { colour: theme.overScan.line })
    }
  }
}
