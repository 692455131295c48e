import { formatNumber } from '../numbers.ts'
import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toScreen } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import { densityRows, eachRow, fullDensity, inView, isDense, markAt } from './columns.ts'
import type { LadderData, MarkColumn, ProposalColumn } from './data.ts'
import { paintSpans } from './spans.ts'
import { yearNumbers } from './yearNumbers.ts'

/** Indices into the document's `marks`. */
const certain = 0
const doubtful = 1
const rejected = 2

/** Width of the lane in which marks stand, CSS pixels; year numbers follow to its right. 120 is a good width for both. */
export const laneWidth = 46

/**
 * The ladder: a rung for each boundary, certain ones whole, doubtful ones broken, rejected ones a small cross; proposals
 * as open rungs as long as they are probable; spans as textured blocks; years beside.
 */
export const paintLadder: Painter<LadderData> = (surface, frame, data, theme) => {
  const lane = { ...frame, width: Math.min(laneWidth, frame.width) }
  surface.clip(frame, () => {
    paintRail(surface, lane, data, theme)
    if (data.proposals) {
      const { proposals } = data
      surface.group('proposals', () => paintProposals(surface, lane, data, proposals, theme))
    }
    surface.group('spans', () =>
      paintSpans(surface, lane, data.viewport, data.spans, theme, {
        selected: data.selectedSpan,
        names: { x: lane.x + lane.width + 10, room: frame.width - lane.width - 10 },
        ground: true,
      }),
    )
    if (data.boundaries) {
      const { boundaries } = data
      surface.group('boundaries', () => {
        if (isDense(data.viewport, boundaries.position)) paintDensity(surface, lane, data, boundaries, theme)
        else paintRungs(surface, lane, data, boundaries, theme)
      })
    }
    surface.group('cursor', () => paintCursor(surface, frame, lane, data, theme))
    surface.group('years', () => paintYears(surface, frame, lane, data, theme))
  })
}

/** The upright at the left: solid as far as the counter has looked, broken below. */
function paintRail(surface: Surface, lane: Frame, data: LadderData, theme: Theme): void {
  const { viewport, checkedTo } = data
  const at = (axis: number) => lane.y + Math.min(lane.height + 1, Math.max(-1, toScreen(viewport, axis)))
  const split = at(Math.min(viewport.length, Math.max(0, checkedTo ?? 0)))
  surface.line(lane.x + 1, at(0), lane.x + 1, split, { colour: theme.ink, width: theme.stroke.strong })
  surface.line(lane.x + 1, split, lane.x + 1, at(viewport.length), {
    colour: theme.faint,
    width: theme.stroke.hair,
    dash: [1, 3],
  })
}

function paintProposals(
  surface: Surface,
  lane: Frame,
  data: LadderData,
  proposals: ProposalColumn,
  theme: Theme,
): void {
  const { viewport } = data
  if (isDense(viewport, proposals.position)) {
    paintProposalDensity(surface, lane, viewport, proposals, theme)
    return
  }
  const left = lane.x + 4
  const longest = lane.width - 8
  const [from, to] = inView(viewport, proposals.position)
  const spacing = to - from > 1 ? viewport.height / (to - from) : viewport.height
  const open = spacing >= 7
  const likely: number[] = []
  const unlikely: number[] = []
  eachRow(viewport, proposals.position, surface.pixelRatio, (i, y) => {
    const right = left + Math.max(3, longest * proposals.probability[i])
    const lines = proposals.chosen[i] === 1 ? likely : unlikely
    const line = lane.y + y
    // An open rung: two rails and an end. Close together there is no room for that, and a thin line must do.
    if (open) {
      lines.push(left, line - 2, right, line - 2, left, line + 2, right, line + 2)
      lines.push(left, line - 2, left, line + 2, right, line - 2, right, line + 2)
    } else lines.push(left, line, right, line)
  })
  surface.lines(unlikely, { colour: theme.faint, width: theme.stroke.hair, opacity: 0.55 })
  surface.lines(likely, { colour: theme.faint, width: theme.stroke.hair })
}

/** Far out: the outline of how close the proposals of the most probable ladder stand; open, as single proposals are. */
function paintProposalDensity(
  surface: Surface,
  lane: Frame,
  viewport: Viewport,
  { position, chosen }: ProposalColumn,
  theme: Theme,
): void {
  const step = 1 / surface.pixelRatio
  const ladder = position.filter((_, i) => chosen[i] === 1)
  const outline: number[] = []
  densityRows(viewport, ladder, fullDensity(viewport, ladder), step).forEach((density, row) => {
    outline.push(density > 0 ? lane.x + 2 + density * (lane.width - 6) : NaN, lane.y + (row + 0.5) * step)
  })
  surface.polyline(outline, { colour: theme.faint, width: theme.stroke.hair })
}

function paintRungs(surface: Surface, lane: Frame, data: LadderData, boundaries: MarkColumn, theme: Theme): void {
  const left = lane.x + 2
  const right = lane.x + lane.width - 4
  const third = (right - left) / 3
  const whole: number[] = []
  const broken: number[] = []
  const chosen: number[] = []
  const crosses: number[] = []
  eachRow(data.viewport, boundaries.position, surface.pixelRatio, (i, y) => {
    const line = lane.y + y
    const mark = boundaries.mark[i]
    const isChosen = data.selected?.[i] === 1
    if (mark === rejected) crosses.push(line)
    else if (mark === doubtful) {
      const ends = [left, line, left + third, line, right - third, line, right, line]
      ;(isChosen ? chosen : broken).push(...ends)
    } else (isChosen ? chosen : whole).push(left, line, right, line)
  })
  surface.lines(whole, { colour: theme.ink, width: theme.stroke.thin })
  surface.lines(broken, { colour: theme.ink, width: theme.stroke.thin })
  surface.lines(chosen, { colour: theme.accent, width: theme.stroke.strong })
  for (const line of crosses) {
    surface.marker('cross', left + 8, line, 7, { stroke: { colour: theme.faint, width: theme.stroke.thin } })
  }
}

/** Far out: how close the boundaries stand, and where the doubtful ones are. */
function paintDensity(surface: Surface, lane: Frame, data: LadderData, boundaries: MarkColumn, theme: Theme): void {
  const { viewport } = data
  const step = 1 / surface.pixelRatio
  const all = densityRows(viewport, boundaries.position, fullDensity(viewport, boundaries.position), step)
  const bars: number[] = []
  const left = lane.x + 2
  for (let row = 0; row < all.length; row++) {
    const line = lane.y + (row + 0.5) * step
    if (all[row] > 0) bars.push(left, line, left + all[row] * (lane.width - 6), line)
  }
  surface.lines(bars, { colour: theme.faint, width: step, opacity: 0.6 })
  // One thin mark on the rail for each row that holds a doubtful boundary: they are what one looks for from afar.
  const doubts: number[] = []
  const [from, to] = inView(viewport, boundaries.position)
  let last = -1
  for (let i = from; i < to; i++) {
    if (boundaries.mark[i] !== doubtful) continue
    const row = Math.floor(toScreen(viewport, boundaries.position[i]) / step)
    if (row === last) continue
    last = row
    const line = lane.y + (row + 0.5) * step
    doubts.push(lane.x + lane.width - 10, line, lane.x + lane.width - 4, line)
  }
  surface.lines(doubts, { colour: theme.ink, width: step })
}

function paintCursor(surface: Surface, frame: Frame, lane: Frame, data: LadderData, theme: Theme): void {
  if (data.cursor === null) return
  const y = toScreen(data.viewport, data.cursor)
  if (y < -4 || y > frame.height + 4) return
  const line = frame.y + y
  surface.line(lane.x, line, lane.x + lane.width, line, { colour: theme.accent, width: theme.stroke.strong })
  surface.marker('left', lane.x + lane.width + 3, line, 8, { fill: theme.accent })
}

function paintYears(surface: Surface, frame: Frame, lane: Frame, data: LadderData, theme: Theme): void {
  const { boundaries, years, cursor, viewport } = data
  if (!boundaries || !years || frame.width <= lane.width + 8) return
  const size = theme.size.small
  const atCursor = cursor === null ? -1 : markAt(viewport, boundaries.position, cursor)
  const write = data.yearText ?? ((year: number) => formatNumber(year, Number.isInteger(year) ? 0 : 1))
  for (const { index, y, year } of yearNumbers(viewport, boundaries.position, years, size * 1.35, atCursor)) {
    const isCertain = boundaries.mark[index] === certain
    surface.text(write(year), lane.x + lane.width + 10, frame.y + y, {
      size,
      colour: index === atCursor ? theme.accent : isCertain ? theme.ink : theme.quiet,
      weight: index === atCursor ? 'bold' : 'normal',
      baseline: 'middle',
    })
  }
}
