import { runsOf } from './labels.ts'
import { markerCorners, markerStrokes } from './markers.ts'
import type { Frame, Label, MarkerShape, Paint, Picture, Stroke, Surface, TextStyle, Texture } from './surface.ts'
import { typeWidth } from './typeWidths.ts'

/** A figure under construction: draw on it, then take its text. */
export interface SvgSurface extends Surface {
  /** What has been drawn, with the definitions it needs; without the enclosing `svg` element. */
  markup(): string
}

/**
 * A surface that writes SVG 1.1. Units are whatever the enclosing `viewBox` says; see exportPlot.ts.
 * `prefix` begins every id, so that several figures can stand in one page.
 */
export function svgSurface(prefix = ''): SvgSurface {
  return new Builder(prefix)
}

const plain: Record<string, string | undefined> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
}

/** Text safe inside elements and attributes. Characters that XML 1.0 does not allow at all (its production 2) are left out. */
export function escapeXml(text: string): string {
  let safe = ''
  for (const letter of text) {
    const code = letter.codePointAt(0) ?? 0
    const allowed =
      code === 0x9 ||
      code === 0xa ||
      code === 0xd ||
      (code >= 0x20 && code <= 0xd7ff) ||
      (code >= 0xe000 && code <= 0xfffd) ||
      code > 0xffff
    if (allowed) safe += plain[letter] ?? letter
  }
  return safe
}

/** Hundredths of a unit are finer than any printer; shorter numbers make a figure half the size. */
function n(value: number): string {
  const rounded = Math.round(value * 100) / 100
  return Object.is(rounded, -0) ? '0' : String(rounded)
}

class Builder implements SvgSurface {
  /** Of a figure printed at 300 dots per inch. */
  readonly pixelRatio = 300 / 96
  readonly #prefix: string
  readonly #parts: string[] = []
  readonly #clips = new Map<string, string>()
  readonly #definitions = new Map<string, string>()

  constructor(prefix: string) {
    this.#prefix = escapeXml(prefix)
  }

  line(x1: number, y1: number, x2: number, y2: number, stroke: Stroke): void {
    this.#parts.push(`<line x1="${n(x1)}" y1="${n(y1)}" x2="${n(x2)}" y2="${n(y2)}"${strokeOf(stroke)}/>`)
  }

  lines(ends: ArrayLike<number>, stroke: Stroke): void {
    let d = ''
    for (let i = 0; i + 3 < ends.length; i += 4) {
      d += `M${n(ends[i])} ${n(ends[i + 1])}`
      if (ends[i + 1] === ends[i + 3]) d += `H${n(ends[i + 2])}`
      else d += `L${n(ends[i + 2])} ${n(ends[i + 3])}`
    }
    if (d !== '') this.#parts.push(`<path d="${d}" fill="none"${strokeOf(stroke)}/>`)
  }

  polyline(points: ArrayLike<number>, stroke: Stroke): void {
    let d = ''
    let down = false
    for (let i = 0; i + 1 < points.length; i += 2) {
      if (Number.isNaN(points[i]) || Number.isNaN(points[i + 1])) down = false
      else {
        d += `${down ? 'L' : 'M'}${n(points[i])} ${n(points[i + 1])}`
        down = true
      }
    }
    if (d !== '') this.#parts.push(`<path d="${d}" fill="none" stroke-linejoin="round"${strokeOf(stroke)}/>`)
  }

  polygon(points: ArrayLike<number>, paint: Paint): void {
    const pairs: string[] = []
    for (let i = 0; i + 1 < points.length; i += 2) pairs.push(`${n(points[i])},${n(points[i + 1])}`)
    this.#parts.push(`<polygon points="${pairs.join(' ')}"${paintOf(paint)}/>`)
  }

  rect(frame: Frame, paint: Paint): void {
    this.#parts.push(`<rect${frameOf(frame)}${paintOf(paint)}/>`)
  }

  marker(shape: MarkerShape, x: number, y: number, size: number, paint: Paint): void {
    if (shape === 'circle') {
      this.#parts.push(`<circle cx="${n(x)}" cy="${n(y)}" r="${n(size / 2)}"${paintOf(paint)}/>`)
    } else if (shape === 'cross' || shape === 'plus') {
      if (paint.stroke) this.lines(markerStrokes(shape, x, y, size), paint.stroke)
    } else this.polygon(markerCorners(shape, x, y, size), paint)
  }

  text(label: Label, x: number, y: number, style: TextStyle): void {
    const { anchor = 'start', baseline = 'alphabetic', rotation = 0, weight = 'normal' } = style
    // Programs disagree about dominant-baseline; a shift in the type's own height is understood by all of them.
    const shift = { top: 0.74, middle: 0.36, alphabetic: 0, bottom: -0.22 }[baseline] * style.size
    const runs = runsOf(label, style.size, style.colour)
    const turned = rotation === 0 ? '' : ` transform="rotate(${n(rotation)} ${n(x)} ${n(y)})"`
    const look = ` font-size="${n(style.size)}" fill="${escapeXml(style.colour)}"${weight === 'bold' ? ' font-weight="600"' : ''}`
    const halo = style.halo
      ? ` stroke="${escapeXml(style.halo)}" stroke-width="3" stroke-linejoin="round" paint-order="stroke"`
      : ''
    const body = runs
      .map((run) =>
        run.size === style.size && run.colour === style.colour && run.gap === 0
          ? escapeXml(run.text)
          : `<tspan${run.gap === 0 ? '' : ` dx="${n(run.gap)}"`} font-size="${n(run.size)}" fill="${escapeXml(run.colour)}">${escapeXml(run.text)}</tspan>`,
      )
      .join('')
    this.#parts.push(
      `<text x="${n(x)}" y="${n(y + shift)}"${anchor === 'start' ? '' : ` text-anchor="${anchor}"`}${look}${halo}${turned}>${body}</text>`,
    )
  }

  measure(label: Label, size: number, weight: 'normal' | 'bold' = 'normal'): number {
    return runsOf(label, size, '').reduce((sum, run) => sum + run.gap + typeWidth(run.text, run.size, weight), 0)
  }

  texture(frame: Frame, texture: Texture, colour: string, phase = 0): void {
    const id = `${this.#prefix}${texture}-${colour.replace(/[^\w]/g, '')}`
    if (!this.#definitions.has(id)) this.#definitions.set(id, textureMarkup(id, texture, colour))
    // The phase is of no use on paper: nothing scrolls there. It is taken so that screen and paper agree.
    this.#parts.push(
      `<rect${frameOf({ ...frame, y: frame.y - phase })} fill="url(#${id})"${phase === 0 ? '' : ` transform="translate(0 ${n(phase)})"`}/>`,
    )
  }

  image(picture: Picture, part: Frame, into: Frame, smooth: boolean): void {
    if (picture.href === undefined || part.width <= 0 || part.height <= 0) return
    const whole: Frame = { x: 0, y: 0, width: picture.width, height: picture.height }
    const sx = into.width / part.width
    const sy = into.height / part.height
    const placed = {
      x: into.x - part.x * sx,
      y: into.y - part.y * sy,
      width: whole.width * sx,
      height: whole.height * sy,
    }
    const draw = () =>
      this.#parts.push(
        `<image${frameOf(placed)} preserveAspectRatio="none"${smooth ? '' : ' image-rendering="pixelated"'} href="${escapeXml(picture.href ?? '')}"/>`,
      )
    if (part.x === 0 && part.y === 0 && part.width === picture.width && part.height === picture.height) draw()
    else this.clip(into, draw)
  }

  clip(frame: Frame, draw: () => void): void {
    const place = frameOf(frame)
    let id = this.#clips.get(place)
    if (id === undefined) {
      id = `${this.#prefix}clip${this.#clips.size + 1}`
      this.#clips.set(place, id)
      this.#definitions.set(id, `<clipPath id="${id}"><rect${place}/></clipPath>`)
    }
    this.#parts.push(`<g clip-path="url(#${id})">`)
    draw()
    this.#parts.push('</g>')
  }

  group(name: string, draw: () => void): void {
    this.#parts.push(`<g data-part="${escapeXml(name)}">`)
    draw()
    this.#parts.push('</g>')
  }

  markup(): string {
    const definitions = this.#definitions.size === 0 ? '' : `<defs>${[...this.#definitions.values()].join('')}</defs>\n`
    return definitions + this.#parts.join('\n')
  }
}

function frameOf(frame: Frame): string {
  return ` x="${n(frame.x)}" y="${n(frame.y)}" width="${n(Math.max(0, frame.width))}" height="${n(Math.max(0, frame.height))}"`
}

function strokeOf(stroke: Stroke): string {
  const dash = stroke.dash && stroke.dash.length > 0 ? ` stroke-dasharray="${stroke.dash.map(n).join(' ')}"` : ''
  const opacity = stroke.opacity === undefined || stroke.opacity === 1 ? '' : ` stroke-opacity="${n(stroke.opacity)}"`
  return ` stroke="${escapeXml(stroke.colour)}" stroke-width="${n(stroke.width)}"${dash}${opacity}`
}

function paintOf(paint: Paint): string {
  const fill = ` fill="${escapeXml(paint.fill ?? 'none')}"`
  const opacity = paint.opacity === undefined || paint.opacity === 1 ? '' : ` fill-opacity="${n(paint.opacity)}"`
  return fill + opacity + (paint.stroke ? strokeOf(paint.stroke) : '')
}

function textureMarkup(id: string, texture: Texture, colour: string): string {
  const side = 6
  const tone = escapeXml(colour)
  const body = {
    hatch: `<path d="M-1 7L7 -1M-4 4L4 -4M2 10L10 2" stroke="${tone}" stroke-width="0.7"/>`,
    stipple: `<circle cx="1" cy="1" r="0.6" fill="${tone}"/><circle cx="4" cy="4" r="0.6" fill="${tone}"/>`,
    rule: `<path d="M0 1H6M0 4H6" stroke="${tone}" stroke-width="0.6"/>`,
  }[texture]
  return `<pattern id="${id}" width="${side}" height="${side}" patternUnits="userSpaceOnUse">${body}</pattern>`
}
