import { lowerBound } from '../sorted.ts'
import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toScreen } from '../viewport.ts'
import { eachRow, inView, isDense } from './columns.ts'
import type { AgeErrorData, ConfidenceData } from './data.ts'

/** The probability of every boundary: 0 at the left edge, 1 at the right. */
export const paintConfidence: Painter<ConfidenceData> = (surface, frame, data, theme) => {
  const inner = { ...frame, x: frame.x + 3, width: frame.width - 6 }
  surface.clip(frame, () => {
    for (const level of [0, 0.5, 1]) {
      const x = inner.x + level * inner.width
      surface.line(x, frame.y, x, frame.y + frame.height, {
        colour: theme.hairline,
        width: theme.stroke.hair,
        dash: level === 0.5 ? [2, 3] : undefined,
      })
    }
    if (isDense(data.viewport, data.position)) paintSpread(surface, inner, data, theme)
    else paintPins(surface, inner, data, theme)
    if (data.cursor !== null) {
      const y = frame.y + toScreen(data.viewport, data.cursor)
      surface.line(frame.x, y, frame.x + frame.width, y, { colour: theme.accent, width: theme.stroke.hair })
    }
  })
}

/** Candidates less probable than this are all but ruled out; a tick at the edge is enough for them. */
const ruledOut = 0.05

/** Close up: a pin for each boundary, its head filled where it is more likely a year than not. */
function paintPins(surface: Surface, frame: Frame, data: ConfidenceData, theme: Theme): void {
  const pins: number[] = []
  const heads: { x: number; y: number; likely: boolean }[] = []
  eachRow(data.viewport, data.position, surface.pixelRatio, (i, y) => {
    if (data.probability[i] < ruledOut) {
      pins.push(frame.x, frame.y + y, frame.x + 3, frame.y + y)
      return
    }
    const x = frame.x + data.probability[i] * frame.width
    pins.push(frame.x, frame.y + y, x, frame.y + y)
    heads.push({ x, y: frame.y + y, likely: data.probability[i] >= 0.5 })
  })
  surface.lines(pins, { colour: theme.hairline, width: theme.stroke.hair })
  const spacing = heads.length > 1 ? (heads[heads.length - 1].y - heads[0].y) / (heads.length - 1) : 20
  const size = Math.min(4.5, Math.max(2, spacing * 0.7))
  for (const { x, y, likely } of heads) {
    surface.marker('circle', x, y, size, {
      fill: likely ? theme.ink : theme.ground,
      stroke: likely ? undefined : { colour: theme.ink, width: theme.stroke.hair },
    })
  }
}

/** Half height of the stretch over which the mean is taken from afar, CSS pixels. */
const meanReach = 8

/**
 * From afar, what is in doubt: in each row, a line from the right edge for what the least likely of the likely boundaries
 * lacks to certainty, and one from the left for the likeliest of the unlikely. Over it, the mean of the likely ones.
 */
function paintSpread(surface: Surface, frame: Frame, data: ConfidenceData, theme: Theme): void {
  const { viewport, position, probability } = data
  const step = 1 / surface.pixelRatio
  const axisAt = (y: number) => viewport.top + y / viewport.scale
  const doubts: number[] = []
  const mean: number[] = []
  let [from, to, row] = [0, 0, lowerBound(position, axisAt(0))]
  for (let y = 0; y < viewport.height; y += step) {
    const line = frame.y + y + step / 2
    let [likely, unlikely] = [1, 0]
    for (; row < position.length && position[row] < axisAt(y + step); row++) {
      if (probability[row] >= 0.5) likely = Math.min(likely, probability[row])
      else unlikely = Math.max(unlikely, probability[row])
    }
    if (likely < 1) doubts.push(frame.x + likely * frame.width, line, frame.x + frame.width, line)
    if (unlikely > 0) doubts.push(frame.x, line, frame.x + unlikely * frame.width, line)
    from = lowerBound(position, axisAt(y - meanReach), from)
    to = lowerBound(position, axisAt(y + meanReach), to)
    mean.push(frame.x + likelyMean(probability, from, to) * frame.width, line)
  }
  surface.lines(doubts, { colour: theme.bandNarrow, width: step })
  surface.polyline(mean, { colour: theme.ink, width: theme.stroke.hair })
}

/** Mean probability of those boundaries that are more likely years than not; NaN where there is none. */
function likelyMean(probability: Float64Array, from: number, to: number): number {
  let [sum, count] = [0, 0]
  for (let i = from; i < to; i++) {
    if (probability[i] < 0.5) continue
    sum += probability[i]
    count += 1
  }
  return count > 0 ? sum / count : NaN
}

/** Years at the edge of the error column: the greatest error, at least one year. */
export function ageErrorLimit(data: Pick<AgeErrorData, 'younger' | 'older' | 'limit'>): number {
  return data.limit ?? Math.max(1, greatest(data.younger), greatest(data.older))
}

/** The error of the chronology as a band that widens downcore about its own middle, younger to the left. */
export const paintAgeError: Painter<AgeErrorData> = (surface, frame, data, theme) => {
  const { viewport, position, younger, older } = data
  const middle = frame.x + frame.width / 2
  const perYear = (frame.width / 2 - 1) / ageErrorLimit(data)
  const left: number[] = []
  const right: number[] = []
  const add = (i: number) => {
    const y = frame.y + toScreen(viewport, position[i])
    left.push(middle - younger[i] * perYear, y)
    right.push(middle + older[i] * perYear, y)
  }
  // The marks just beyond the window take part, so that the band does not end between two of them.
  const [first, end] = inView(viewport, position)
  if (first > 0) add(first - 1)
  eachRow(viewport, position, surface.pixelRatio, add, 0)
  if (end < position.length) add(end)
  const outline = [...left]
  for (let i = right.length - 2; i >= 0; i -= 2) outline.push(right[i], right[i + 1])
  surface.clip(frame, () => {
    if (outline.length >= 6) surface.polygon(outline, { fill: theme.bandWide })
    for (const edge of [left, right]) surface.polyline(edge, { colour: theme.faint, width: theme.stroke.hair })
    const top = frame.y + Math.max(0, toScreen(viewport, 0))
    const bottom = frame.y + Math.min(frame.height, toScreen(viewport, viewport.length))
    surface.line(middle, top, middle, bottom, { colour: theme.ink, width: theme.stroke.hair })
  })
}

function greatest(column: Float64Array): number {
  let most = 0
  for (const value of column) if (value > most) most = value
  return most
}
