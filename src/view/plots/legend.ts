import type { Frame, MarkerShape, Paint, Stroke, Surface, Texture } from '../surface.ts'
import type { Theme } from '../theme.ts'

/** What stands beside a name in the legend: the thing itself, small. */
export type LegendSample =
  | { kind: 'line'; stroke: Stroke }
  | { kind: 'area'; fill: string }
  | { kind: 'texture'; texture: Texture; colour: string }
  | { kind: 'marker'; shape: MarkerShape; paint: Paint }
  | { kind: 'series'; stroke: Stroke; shape: MarkerShape; paint: Paint }

export interface LegendItem {
  name: string
  sample: LegendSample
}

const sampleWidth = 22

/** Draws the legend from the upper left of a frame, in as many rows as it needs; returns the height it took. */
export function drawLegend(surface: Surface, frame: Frame, items: readonly LegendItem[], theme: Theme): number {
  if (items.length === 0) return 0
  const size = theme.size.small
  const row = size * 1.6
  let x = frame.x
  let y = frame.y + row / 2
  surface.group('legend', () => {
    for (const { name, sample } of items) {
      const width = sampleWidth + 5 + surface.measure(name, size) + 16
      if (x > frame.x && x + width - 16 > frame.x + frame.width) {
        x = frame.x
        y += row
      }
      drawSample(surface, sample, x, y, theme)
      surface.text(name, x + sampleWidth + 5, y, { size, colour: theme.ink, baseline: 'middle' })
      x += width
    }
  })
  return y + row / 2 - frame.y + 4
}

function drawSample(surface: Surface, sample: LegendSample, x: number, y: number, theme: Theme): void {
  const box = { x, y: y - 4.5, width: sampleWidth, height: 9 }
  if (sample.kind === 'line') surface.line(x, y, x + sampleWidth, y, sample.stroke)
  else if (sample.kind === 'series') {
    surface.line(x, y, x + sampleWidth, y, sample.stroke)
    surface.marker(sample.shape, x + sampleWidth / 2, y, 6, sample.paint)
  } else if (sample.kind === 'area') surface.rect(box, { fill: sample.fill })
  else if (sample.kind === 'marker') surface.marker(sample.shape, x + sampleWidth / 2, y, 7, sample.paint)
  else {
    surface.texture(box, sample.texture, sample.colour)
    surface.rect(box, { stroke: { colour: theme.faint, width: theme.stroke.hair } })
  }
}

/** Writes a caption along the lower edge of a frame, broken between words; returns the height it took. */
export function drawCaption(surface: Surface, frame: Frame, caption: string | undefined, theme: Theme): number {
  if (caption === undefined || caption === '') return 0
  const size = theme.size.small
  const lines = brokenLines(surface, caption, size, frame.width)
  const height = lines.length * size * 1.35
  lines.forEach((line, i) => {
    const y = frame.y + frame.height - height + (i + 0.8) * size * 1.35
    surface.text(line, frame.x, y, { size, colour: theme.quiet })
  })
  return height + size * 0.8
}

function brokenLines(surface: Surface, text: string, size: number, width: number): string[] {
  const lines: string[] = []
  let line = ''
  // Ordinary spaces only: one that does not break holds a number and its unit together.
  for (const word of text.split(/[ \n]+/)) {
    const longer = line === '' ? word : `${line} ${word}`
    if (line !== '' && surface.measure(longer, size) > width) {
      lines.push(line)
      line = word
    } else line = longer
  }
  return [...lines, line]
}

/** What a legend at the top and a caption at the bottom leave of a frame. */
export function drawSurroundings(
  surface: Surface,
  frame: Frame,
  items: readonly LegendItem[],
  caption: string | undefined,
  theme: Theme,
): Frame {
  const top = drawLegend(surface, frame, items, theme) + theme.size.small * 0.7
  const bottom = drawCaption(surface, frame, caption, theme)
  return { x: frame.x, y: frame.y + top, width: frame.width, height: Math.max(1, frame.height - top - bottom) }
}
