import { plainText, runsOf } from '../../../src/view/labels.ts'
import type {
  Frame,
  Label,
  MarkerShape,
  Paint,
  Picture,
  Stroke,
  Surface,
  TextStyle,
  Texture,
} from '../../../src/view/surface.ts'
import { typeWidth } from '../../../src/view/typeWidths.ts'

export interface TextBox extends Frame {
  text: string
}

/** A surface that remembers what was drawn on it, for tests of what painters do without looking at pixels. */
export class RecordingSurface implements Surface {
  readonly pixelRatio: number
  readonly texts: TextBox[] = []
  readonly segments: { ends: number[]; stroke: Stroke; group: string }[] = []
  readonly polylines: { points: number[]; stroke: Stroke; group: string }[] = []
  readonly polygons: { points: number[]; paint: Paint }[] = []
  readonly rects: { frame: Frame; paint: Paint }[] = []
  readonly markers: { shape: MarkerShape; x: number; y: number; paint: Paint; group: string }[] = []
  readonly textures: { frame: Frame; texture: Texture; colour: string }[] = []
  readonly images: { picture: Picture; into: Frame; smooth: boolean }[] = []
  readonly groups: string[] = []
  #group = ''

  constructor(pixelRatio = 1) {
    this.pixelRatio = pixelRatio
  }

  line(x1: number, y1: number, x2: number, y2: number, stroke: Stroke): void {
    this.lines([x1, y1, x2, y2], stroke)
  }
  lines(ends: ArrayLike<number>, stroke: Stroke): void {
    if (ends.length % 4 !== 0) throw new Error(`lines come in fours of numbers; there are ${ends.length}`)
    if (ends.length > 0) this.segments.push({ ends: Array.from(ends), stroke, group: this.#group })
  }
  polyline(points: ArrayLike<number>, stroke: Stroke): void {
    this.polylines.push({ points: Array.from(points), stroke, group: this.#group })
  }
  polygon(points: ArrayLike<number>, paint: Paint): void {
    this.polygons.push({ points: Array.from(points), paint })
  }
  rect(frame: Frame, paint: Paint): void {
    this.rects.push({ frame, paint })
  }
  marker(shape: MarkerShape, x: number, y: number, _size: number, paint: Paint): void {
    this.markers.push({ shape, x, y, paint, group: this.#group })
  }
  text(label: Label, x: number, y: number, style: TextStyle): void {
    const width = this.measure(label, style.size, style.weight)
    const height = style.size
    const left = { start: 0, middle: -width / 2, end: -width }[style.anchor ?? 'start']
    const top = { top: 0, middle: -height / 2, alphabetic: -0.76 * height, bottom: -height }[
      style.baseline ?? 'alphabetic'
    ]
    const text = plainText(label)
    if ((style.rotation ?? 0) === 0) this.texts.push({ text, x: x + left, y: y + top, width, height })
    else if (style.rotation === -90) {
      this.texts.push({ text, x: x + top, y: y - left - width, width: height, height: width })
    } else throw new Error(`no box is known for text turned by ${style.rotation}`)
  }
  measure(label: Label, size: number, weight: 'normal' | 'bold' = 'normal'): number {
    return runsOf(label, size, '').reduce((sum, run) => sum + run.gap + typeWidth(run.text, run.size, weight), 0)
  }
  texture(frame: Frame, texture: Texture, colour: string): void {
    this.textures.push({ frame, texture, colour })
  }
  image(picture: Picture, _part: Frame, into: Frame, smooth: boolean): void {
    this.images.push({ picture, into, smooth })
  }
  clip(_frame: Frame, draw: () => void): void {
    draw()
  }
  group(name: string, draw: () => void): void {
    const outer = this.#group
    this.#group = name
    this.groups.push(name)
    draw()
    this.#group = outer
  }
}

/** Pairs of texts whose boxes overlap by more than a hair, for messages that say which. */
export function overlaps(texts: readonly TextBox[]): string[] {
  const found: string[] = []
  const slack = 0.5
  texts.forEach((a, i) => {
    for (const b of texts.slice(i + 1)) {
      const apart =
        a.x + a.width <= b.x + slack ||
        b.x + b.width <= a.x + slack ||
        a.y + a.height <= b.y + slack ||
        b.y + b.height <= a.y + slack
      if (!apart) found.push(`${a.text} | ${b.text}`)
    }
  })
  return found
}

/** Texts that reach out of a frame by more than a hair. */
export function outside(texts: readonly TextBox[], frame: Frame): string[] {
  return texts
    .filter(
      ({ x, y, width, height }) =>
        x < frame.x - 1 ||
        y < frame.y - 1 ||
        x + width > frame.x + frame.width + 1 ||
        y + height > frame.y + frame.height + 1,
    )
    .map(({ text }) => text)
}
