import { runsOf } from './labels.ts'
import { markerCorners, markerStrokes } from './markers.ts'
import type { Frame, Label, MarkerShape, Paint, Picture, Stroke, Surface, TextStyle, Texture } from './surface.ts'

type Context = CanvasRenderingContext2D | OffscreenCanvasRenderingContext2D

/** Gives a canvas the size of its place on the page in device pixels and clears it; returns the surface to draw on. */
export function prepareCanvas(
  canvas: HTMLCanvasElement | OffscreenCanvas,
  width: number,
  height: number,
  devicePixelRatio: number,
  font: string,
): Surface | null {
  const pixelWidth = Math.max(1, Math.round(width * devicePixelRatio))
  const pixelHeight = Math.max(1, Math.round(height * devicePixelRatio))
  // Setting the size clears the canvas and drops its memory; it is done only when the size changes.
  if (canvas.width !== pixelWidth) canvas.width = pixelWidth
  if (canvas.height !== pixelHeight) canvas.height = pixelHeight
  const context: Context | null = canvas.getContext('2d')
  if (!context) return null
  context.setTransform(1, 0, 0, 1, 0, 0)
  context.clearRect(0, 0, pixelWidth, pixelHeight)
  return canvasSurface(context, devicePixelRatio, font)
}

/** A surface on a canvas context: units are CSS pixels, hairlines lie on whole device pixels. */
export function canvasSurface(context: Context, devicePixelRatio: number, font: string): Surface {
  context.setTransform(devicePixelRatio, 0, 0, devicePixelRatio, 0, 0)
  return new CanvasSurface(context, devicePixelRatio, font)
}

/** Patterns already made; a surface lives for one frame, a pattern serves all canvases. A few themes and screens make a few dozen. */
const textures = new Map<string, CanvasPattern | null>()

class CanvasSurface implements Surface {
  readonly #context: Context
  readonly pixelRatio: number
  readonly #font: string

  constructor(context: Context, ratio: number, font: string) {
    this.#context = context
    this.pixelRatio = ratio
    this.#font = font
  }

  line(x1: number, y1: number, x2: number, y2: number, stroke: Stroke): void {
    this.lines([x1, y1, x2, y2], stroke)
  }

  lines(ends: ArrayLike<number>, stroke: Stroke): void {
    const context = this.#context
    const width = this.#setStroke(stroke)
    context.beginPath()
    for (let i = 0; i + 3 < ends.length; i += 4) {
      let x1 = ends[i]
      let y1 = ends[i + 1]
      let x2 = ends[i + 2]
      let y2 = ends[i + 3]
      if (y1 === y2) y1 = y2 = this.#crisp(y1, width)
      else if (x1 === x2) x1 = x2 = this.#crisp(x1, width)
      context.moveTo(x1, y1)
      context.lineTo(x2, y2)
    }
    context.stroke()
    context.globalAlpha = 1
  }

  polyline(points: ArrayLike<number>, stroke: Stroke): void {
    const context = this.#context
    this.#setStroke(stroke)
    context.lineJoin = 'round'
    context.beginPath()
    let down = false
    for (let i = 0; i + 1 < points.length; i += 2) {
      if (Number.isNaN(points[i]) || Number.isNaN(points[i + 1])) down = false
      else if (down) context.lineTo(points[i], points[i + 1])
      else {
        context.moveTo(points[i], points[i + 1])
        down = true
      }
    }
    context.stroke()
    context.globalAlpha = 1
  }

  polygon(points: ArrayLike<number>, paint: Paint): void {
    const context = this.#context
    context.beginPath()
    for (let i = 0; i + 1 < points.length; i += 2) context.lineTo(points[i], points[i + 1])
    context.closePath()
    this.#paint(paint)
  }

  rect(frame: Frame, paint: Paint): void {
    const context = this.#context
    const width = paint.stroke ? this.#setStroke(paint.stroke) : 0
    const left = paint.stroke ? this.#crisp(frame.x, width) : this.#snap(frame.x)
    const top = paint.stroke ? this.#crisp(frame.y, width) : this.#snap(frame.y)
    // A frame of any height keeps at least one device pixel: a thin span must not vanish between rows.
    const least = 1 / this.pixelRatio
    const right = Math.max(left + least, this.#snap(frame.x + frame.width) - (paint.stroke ? width / 2 : 0))
    const bottom = Math.max(top + least, this.#snap(frame.y + frame.height) - (paint.stroke ? width / 2 : 0))
    context.beginPath()
    context.rect(left, top, right - left, bottom - top)
    this.#paint(paint)
  }

  marker(shape: MarkerShape, x: number, y: number, size: number, paint: Paint): void {
    if (shape === 'cross' || shape === 'plus') {
      if (paint.stroke) {
        const [x1, y1, x2, y2, x3, y3, x4, y4] = markerStrokes(shape, x, y, size)
        this.polyline([x1, y1, x2, y2, NaN, NaN, x3, y3, x4, y4], paint.stroke)
      }
    } else if (shape === 'circle') {
      this.#context.beginPath()
      this.#context.arc(x, y, size / 2, 0, 2 * Math.PI)
      this.#paint(paint)
    } else this.polygon(markerCorners(shape, x, y, size), paint)
  }

  text(label: Label, x: number, y: number, style: TextStyle): void {
    const context = this.#context
    const { anchor = 'start', baseline = 'alphabetic', rotation = 0, weight = 'normal' } = style
    context.textBaseline = baseline
    context.textAlign = 'left'
    if (rotation !== 0) {
      context.save()
      context.translate(x, y)
      context.rotate((rotation * Math.PI) / 180)
    }
    let pen = rotation === 0 ? x : 0
    // Whole device pixels keep the letters from trembling while the core scrolls.
    const line = rotation === 0 ? this.#snap(y) : 0
    if (anchor !== 'start') pen -= this.measure(label, style.size, weight) * (anchor === 'middle' ? 0.5 : 1)
    for (const run of runsOf(label, style.size, style.colour)) {
      pen += run.gap
      this.#setFont(run.size, weight)
      if (style.halo) {
        context.strokeStyle = style.halo
        context.lineWidth = 3
        context.lineJoin = 'round'
        context.setLineDash([])
        context.strokeText(run.text, pen, line)
      }
      context.fillStyle = run.colour
      context.fillText(run.text, pen, line)
      pen += context.measureText(run.text).width
    }
    if (rotation !== 0) context.restore()
  }

  measure(label: Label, size: number, weight: 'normal' | 'bold' = 'normal'): number {
    let width = 0
    for (const run of runsOf(label, size, '')) {
      this.#setFont(run.size, weight)
      width += run.gap + this.#context.measureText(run.text).width
    }
    return width
  }

  texture(frame: Frame, texture: Texture, colour: string, phase = 0): void {
    const pattern = this.#texture(texture, colour)
    if (!pattern) return
    const move = Math.round((((phase % textureSide) + textureSide) % textureSide) * this.pixelRatio) / this.pixelRatio
    pattern.setTransform(new DOMMatrix([1 / this.pixelRatio, 0, 0, 1 / this.pixelRatio, 0, move]))
    this.#context.fillStyle = pattern
    this.#context.fillRect(frame.x, frame.y, frame.width, frame.height)
  }

  image(picture: Picture, part: Frame, into: Frame, smooth: boolean): void {
    if (!picture.source) return
    const context = this.#context
    context.imageSmoothingEnabled = smooth
    // Both edges of neighbouring tiles fall on the same device pixel: no seam shows between them.
    const left = this.#snap(into.x)
    const top = this.#snap(into.y)
    const width = this.#snap(into.x + into.width) - left
    const height = this.#snap(into.y + into.height) - top
    if (width <= 0 || height <= 0) return
    context.drawImage(picture.source, part.x, part.y, part.width, part.height, left, top, width, height)
  }

  clip(frame: Frame, draw: () => void): void {
    const context = this.#context
    context.save()
    context.beginPath()
    context.rect(frame.x, frame.y, frame.width, frame.height)
    context.clip()
    draw()
    context.restore()
  }

  group(_name: string, draw: () => void): void {
    draw()
  }

  #paint(paint: Paint): void {
    const context = this.#context
    if (paint.fill) {
      context.globalAlpha = paint.opacity ?? 1
      context.fillStyle = paint.fill
      context.fill()
      context.globalAlpha = 1
    }
    if (paint.stroke) {
      this.#setStroke(paint.stroke)
      context.stroke()
      context.globalAlpha = 1
    }
  }

  /** Sets the pen and returns the width it really has, CSS pixels: whole device pixels, at least one. */
  #setStroke(stroke: Stroke): number {
    const context = this.#context
    const width = Math.max(1, Math.round(stroke.width * this.pixelRatio)) / this.pixelRatio
    context.strokeStyle = stroke.colour
    context.globalAlpha = stroke.opacity ?? 1
    context.lineWidth = width
    context.setLineDash(stroke.dash ? [...stroke.dash] : [])
    return width
  }

  #setFont(size: number, weight: 'normal' | 'bold'): void {
    const font = `${weight === 'bold' ? '600 ' : ''}${size}px ${this.#font}`
    this.#context.font = font
  }

  /** Nearest device pixel edge. */
  #snap(value: number): number {
    return Math.round(value * this.pixelRatio) / this.pixelRatio
  }

  /** Middle of a line of this width that covers whole device pixels. */
  #crisp(value: number, width: number): number {
    const half = (width * this.pixelRatio) / 2
    return (Math.round(value * this.pixelRatio - half) + half) / this.pixelRatio
  }

  #texture(texture: Texture, colour: string): CanvasPattern | null {
    const key = `${texture} ${colour} ${this.pixelRatio}`
    const known = textures.get(key)
    if (known !== undefined) return known
    const side = Math.round(textureSide * this.pixelRatio)
    const canvas = new OffscreenCanvas(side, side)
    const context: Context | null = canvas.getContext('2d')
    if (context) drawTexture(context, side, texture, colour, this.pixelRatio)
    const pattern = context && this.#context.createPattern(canvas, 'repeat')
    textures.set(key, pattern)
    return pattern
  }
}

/** Side of the repeated square of a texture, CSS pixels. */
export const textureSide = 6

function drawTexture(
  context: OffscreenCanvasRenderingContext2D,
  side: number,
  texture: Texture,
  colour: string,
  ratio: number,
): void {
  context.strokeStyle = colour
  context.fillStyle = colour
  context.lineWidth = ratio
  context.beginPath()
  if (texture === 'hatch') {
    // Three lines, so that the corners of the square are covered too.
    for (const shift of [-side, 0, side]) {
      context.moveTo(shift - 1, side + 1)
      context.lineTo(shift + side + 1, -1)
    }
    context.stroke()
  } else if (texture === 'rule') {
    context.fillRect(0, 0, side, Math.round(ratio))
    context.fillRect(0, Math.round(side / 2), side, Math.round(ratio))
  } else {
    const dot = Math.max(1, Math.round(1.1 * ratio))
    context.fillRect(0, 0, dot, dot)
    context.fillRect(Math.round(side / 2), Math.round(side / 2), dot, dot)
  }
}
