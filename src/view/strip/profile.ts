import { rangeOf } from '../minMaxPyramid.ts'
import { axisToPath, pathToAxis } from '../pathAxis.ts'
import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toAxis, toScreen } from '../viewport.ts'
import { eachRow, isDense } from './columns.ts'
import type { ProfileData, ProfileLine } from './data.ts'
import { paintSpans } from './spans.ts'

/** The intensity along the transect, beside the sediment it was read from. */
export const paintProfile: Painter<ProfileData> = (surface, frame, data, theme) => {
  surface.clip(frame, () => {
    paintSpans(surface, frame, data.viewport, data.spans, theme, { colour: theme.hairline })
    const { boundaries, viewport } = data
    if (boundaries && !isDense(viewport, boundaries.position)) {
      const levels: number[] = []
      eachRow(viewport, boundaries.position, surface.pixelRatio, (i, y) => {
        // 2 is `rejected`: what was looked at and found to be none does not cut the profile into years.
        if (boundaries.mark[i] !== 2) levels.push(frame.x, frame.y + y, frame.x + frame.width, frame.y + y)
      })
      surface.lines(levels, { colour: theme.hairline, width: theme.stroke.hair })
    }
    for (const line of data.lines) surface.group('profile', () => paintLine(surface, frame, data, line, theme))
    if (data.cursor !== null) {
      const y = frame.y + toScreen(viewport, data.cursor)
      surface.line(frame.x, y, frame.x + frame.width, y, { colour: theme.accent, width: theme.stroke.hair })
    }
  })
}

function paintLine(surface: Surface, frame: Frame, data: ProfileData, line: ProfileLine, theme: Theme): void {
  const [low, high] = line.domain
  const perUnit = high > low ? (frame.width - 2) / (high - low) : 0
  const x = (value: number) => frame.x + 1 + Math.min(frame.width, Math.max(-1, (value - low) * perUnit))
  const rows = rowsPerSample(data) * surface.pixelRatio
  const colour = line.tone === 'quiet' ? theme.bandNarrow : theme.ink
  if (rows > 1) surface.polyline(samples(frame, data, line, x), { colour, width: theme.stroke.hair })
  else if (rows > solidBelow)
    surface.polyline(extremes(surface, frame, data, line, x), { colour, width: theme.stroke.hair })
  else {
    // Set back in tone, the solid band leaves the sediment the darkest thing on the page.
    const tone = line.tone === 'quiet' ? theme.bandNarrow : theme.faint
    surface.lines(bars(extremes(surface, frame, data, line, x)), { colour: tone, width: 1 / surface.pixelRatio })
  }
}

/** Below this many device rows for each sample the line is a solid band: one level bar in each row, drawn far more cheaply. */
const solidBelow = 0.25

/** One bar for each row of `extremes`, long enough to touch the bar above it; a gap in the profile is a gap. */
function bars(points: readonly number[]): number[] {
  const ends: number[] = []
  let [last, end] = [NaN, NaN]
  for (let i = 0; i + 3 < points.length; i += 4) {
    let [from, to] = points[i] < points[i + 2] ? [points[i], points[i + 2]] : [points[i + 2], points[i]]
    const row = points[i + 1]
    if (!Number.isNaN(from)) {
      if (end < from) from = end
      if (last > to) to = last
      ends.push(from, row, Math.max(to, from + 0.5), row)
    }
    ;[last, end] = [from, to]
  }
  return ends
}

/** CSS pixels from one sample to the next. */
function rowsPerSample(data: ProfileData): number {
  const { path, viewport } = data
  const last = path.path.length - 1
  const alongAxis = last > 0 ? (path.axis[last] - path.axis[0]) / (path.path[last] - path.path[0]) : 1
  return viewport.scale * alongAxis
}

/** Close up: a vertex for each sample. */
function samples(frame: Frame, data: ProfileData, line: ProfileLine, x: (value: number) => number): number[] {
  const { viewport, path } = data
  const { values } = line.pyramid
  const from = Math.max(0, Math.floor(axisToPath(path, toAxis(viewport, 0))) - 1)
  const to = Math.min(values.length, Math.ceil(axisToPath(path, toAxis(viewport, viewport.height))) + 1)
  const points: number[] = []
  for (let i = from; i < to; i++) {
    points.push(x(values[i]), frame.y + toScreen(viewport, pathToAxis(path, i + 0.5)))
  }
  return points
}

/** From afar: the least and the greatest value in each device row, so that no thin layer vanishes. */
function extremes(
  surface: Surface,
  frame: Frame,
  data: ProfileData,
  line: ProfileLine,
  x: (value: number) => number,
): number[] {
  const { viewport, path } = data
  const step = 1 / surface.pixelRatio
  const range: [number, number] = [NaN, NaN]
  const points: number[] = []
  let pen = NaN
  let from = axisToPath(path, toAxis(viewport, 0))
  for (let y = 0; y < viewport.height; y += step) {
    const to = axisToPath(path, toAxis(viewport, y + step))
    // Rows share their outermost samples: the line would otherwise break between rows that hold one sample each.
    rangeOf(line.pyramid, from, Math.max(to, from + 1), range)
    from = to
    const row = frame.y + y + step / 2
    const [least, greatest] = [x(range[0]), x(range[1])]
    // The end nearer to where the pen is comes first: less ink, the same extremes.
    if (Math.abs(pen - greatest) < Math.abs(pen - least)) {
      points.push(greatest, row, least, row)
      pen = least
    } else {
      points.push(least, row, greatest, row)
      pen = greatest
    }
  }
  return points
}
