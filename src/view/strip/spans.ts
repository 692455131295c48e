import type { Frame, Surface, Texture } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toScreen } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import type { StripSpan } from './data.ts'

/** Each kind of span has its texture, on the core, in plots and in legends alike. */
export const spanTexture: Record<StripSpan['kind'], Texture> = { event: 'hatch', unreadable: 'stipple', hiatus: 'rule' }
export const spanName: Record<StripSpan['kind'], string> = {
  event: 'event bed',
  unreadable: 'unreadable',
  hiatus: 'hiatus',
}

/**
 * Spans as textured blocks across the frame. `selected` is drawn in the accent; `names` is
 * where the kinds stand in words.
 */
export function paintSpans(
  surface: Surface,
  frame: Frame,
  view: Viewport,
  spans: readonly StripSpan[],
  theme: Theme,
  options: { selected?: number | null; names?: { x: number; room: number }; ground?: boolean; colour?: string } = {},
): void {
  spans.forEach((span, index) => {
    const top = Math.max(-1, toScreen(view, span.from))
    const bottom = Math.min(frame.height + 1, toScreen(view, span.to))
    if (bottom < 0 || top > frame.height) return
    const block = { x: frame.x, y: frame.y + top, width: frame.width, height: Math.max(1, bottom - top) }
    const isSelected = options.selected === index
    const tone = isSelected ? theme.accent : (options.colour ?? theme.quiet)
    if (options.ground) surface.rect(block, { fill: isSelected ? theme.accentWash : theme.ground })
    surface.texture(block, spanTexture[span.kind], tone, frame.y + toScreen(view, span.from))
    const edge = { colour: tone, width: isSelected ? theme.stroke.strong : theme.stroke.hair }
    surface.line(block.x, block.y, block.x + block.width, block.y, edge)
    surface.line(block.x, block.y + block.height, block.x + block.width, block.y + block.height, edge)
    if (options.names) paintName(surface, frame, block, options.names, spanName[span.kind], tone, theme)
  })
}

/** The kind in words beside the block, where it is high enough that no year number can stand in the way. */
function paintName(
  surface: Surface,
  frame: Frame,
  block: Frame,
  place: { x: number; room: number },
  name: string,
  tone: string,
  theme: Theme,
): void {
  const size = theme.size.small
  const top = Math.max(frame.y, block.y)
  const height = Math.min(frame.y + frame.height, block.y + block.height) - top
  if (height < size * 2.8 || surface.measure(name, size) > place.room) return
  surface.text(name, place.x, top + height / 2, { size, colour: tone, baseline: 'middle' })
}
