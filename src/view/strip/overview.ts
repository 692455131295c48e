import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { wholeAcross } from '../tiles.ts'
import { uprightSize } from '../upright.ts'
import { fit, toScreen, visibleRange } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import { eachRow } from './columns.ts'
import type { OverviewData } from './data.ts'
import { paintTiles } from './scan.ts'
import { paintSpans } from './spans.ts'

/** Width of the lane beside the thumbnail that shows what has been checked, CSS pixels. */
const checkLane = 12
/** Least height of the window's frame, so that it can be seen and grasped even when single pixels are on screen. */
const leastWindow = 6

/** The view that the overview itself has of the core: all of it. Use it with `tilesNeeded` and to turn a click into a position. */
export function overviewViewport(view: Viewport): Viewport {
  return fit(view.length, view.height)
}

/** The whole core: its picture, what has been checked, spans, and the window on screen. */
export const paintOverview: Painter<OverviewData> = (surface, frame, data, theme) => {
  const whole = { ...overviewViewport({ ...data.viewport, height: frame.height }) }
  const picture = { ...frame, width: Math.max(4, frame.width - checkLane) }
  const lane = { x: frame.x + picture.width, y: frame.y, width: checkLane, height: frame.height }
  const top = toScreen(whole, 0)
  const bottom = toScreen(whole, whole.length)
  surface.rect({ ...picture, y: frame.y + top, height: bottom - top }, { fill: theme.field })
  if (data.grid) {
    const { breadth } = uprightSize(data.grid, data.grid.orientation)
    paintTiles(surface, picture, whole, wholeAcross(breadth, picture.width), data.grid, data.tile)
  }
  paintChecked(surface, lane, whole, data, theme)
  paintWindow(surface, picture, whole, data.viewport, theme)
  if (data.cursor !== null) {
    const y = frame.y + toScreen(whole, data.cursor)
    surface.line(frame.x, y, frame.x + frame.width, y, { colour: theme.accent, width: theme.stroke.thin })
    surface.marker('left', frame.x + frame.width - 3, y, 7, { fill: theme.accent })
  }
}

/** Solid where checked, dotted where not, spans as blocks; doubtful boundaries as short marks beside. */
function paintChecked(surface: Surface, lane: Frame, whole: Viewport, data: OverviewData, theme: Theme): void {
  const x = lane.x + 5
  const at = (axis: number) => lane.y + toScreen(whole, axis)
  surface.line(x, at(0), x, at(whole.length), { colour: theme.faint, width: theme.stroke.hair, dash: [1, 3] })
  for (const { from, to } of data.checked) {
    surface.line(x, at(from), x, at(to), { colour: theme.ink, width: 3 })
  }
  paintSpans(surface, { ...lane, x: lane.x + 1, width: 8 }, whole, data.spans, theme, { ground: true })
  const { boundaries } = data
  if (!boundaries) return
  const doubts: number[] = []
  eachRow(whole, boundaries.position, surface.pixelRatio, (i, y) => {
    if (boundaries.mark[i] === 1) doubts.push(x + 3, lane.y + y, x + 6, lane.y + y)
  })
  surface.lines(doubts, { colour: theme.ink, width: theme.stroke.hair })
}

/** What is on screen stays clear, the rest is veiled. */
function paintWindow(surface: Surface, picture: Frame, whole: Viewport, view: Viewport, theme: Theme): void {
  const [from, to] = visibleRange(view)
  const top = Math.max(toScreen(whole, 0), toScreen(whole, from))
  const bottom = Math.min(toScreen(whole, whole.length), toScreen(whole, to))
  const middle = (top + bottom) / 2
  const height = Math.max(leastWindow, bottom - top)
  const window = { ...picture, y: picture.y + middle - height / 2, height }
  const end = picture.y + picture.height
  surface.rect({ ...picture, height: window.y - picture.y }, { fill: theme.ground, opacity: 0.5 })
  surface.rect(
    { ...picture, y: window.y + height, height: end - window.y - height },
    { fill: theme.ground, opacity: 0.5 },
  )
  surface.rect(window, { stroke: { colour: theme.ink, width: theme.stroke.thin } })
}
