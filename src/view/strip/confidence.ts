import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toScreen } from '../viewport.ts'
import { eachRow, inView, isDense } from './columns.ts'
import type { AgeErrorData, ConfidenceData } from './data.ts'
import { lowerBound } from '../sorted.ts'

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

/** Close up: a pin for each boundary, its head filled where it is more likely a year than not. */
function paintPins(surface: Surface, frame: Frame, data: ConfidenceData, theme: Theme): void {
  const pins: number[] = []
  const heads: { x: number; y: number; likely: boolean }[] = []
  eachRow(data.viewport, data.position, surface.pixelRatio, (i, y) => {
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

/** From afar: least to greatest probability in each row as a grey band, their mean as a line. */
function paintSpread(surface: Surface, frame: Frame, data: ConfidenceData, theme: Theme): void {
  const { viewport, position, probability } = data
  const step = 1 / surface.pixelRatio
  const band: number[] = []
  const mean: number[] = []
  let from = inView(viewport, position)[0]
  for (let y = 0; y < viewport.height; y += step) {
    const to = lowerBound(position, viewport.top + (y + step) / viewport.scale, from)
    let [least, greatest, sum] = [1, 0, 0]
    for (let i = from; i < to; i++) {
      least = Math.min(least, probability[i])
      greatest = Math.max(greatest, probability[i])
      sum += probability[i]
    }
    if (to > from) {
      const line = frame.y + y + step / 2
      band.push(frame.x + least * frame.width, line, frame.x + greatest * frame.width, line)
      mean.push(frame.x + (sum / (to - from)) * frame.width, line)
    }
    from = to
  }
  surface.lines(band, { colour: theme.bandNarrow, width: step })
  surface.polyline(mean, { colour: theme.ink, width: theme.stroke.hair })
}

/** The error of the chronology as a band that widens downcore about its own middle, younger to the left. */
export const paintAgeError: Painter<AgeErrorData> = (surface, frame, data, theme) => {
  const { viewport, position, younger, older } = data
  const limit = data.limit ?? Math.max(1, greatest(younger), greatest(older))
  const middle = frame.x + frame.width / 2
  const perYear = (frame.width / 2 - 1) / limit
  const left: number[] = []
  const right: number[] = []
  eachRow(
    viewport,
    position,
    surface.pixelRatio,
    (i, y) => {
      left.push(middle - younger[i] * perYear, frame.y + y)
      right.push(middle + older[i] * perYear, frame.y + y)
    },
    // Marks far beyond the window take part, so that the band does not end between two of them.
    200,
  )
  const outline = [...left]
  for (let i = right.length - 2; i >= 0; i -= 2) outline.push(right[i], right[i + 1])
  surface.clip(frame, () => {
    if (outline.length >= 6) surface.polygon(outline, { fill: theme.bandWide })
    for (const edge of [left, right]) surface.polyline(edge, { colour: theme.faint, width: theme.stroke.hair })
    surface.line(middle, frame.y, middle, frame.y + frame.height, { colour: theme.ink, width: theme.stroke.hair })
  })
}

function greatest(column: Float64Array): number {
  let most = 0
  for (const value of column) if (value > most) most = value
  return most
}
