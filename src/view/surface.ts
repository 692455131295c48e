import type { Theme } from './theme.ts'

/** A rectangle to draw in, in surface units: CSS pixels on a canvas, 1/96 inch in an exported figure. */
export interface Frame {
  x: number
  y: number
  width: number
  height: number
}

export interface Stroke {
  colour: string
  width: number
  /** Lengths of dash and gap, surface units. */
  dash?: readonly number[] | undefined
  opacity?: number | undefined
}

/** How an area is painted; without `fill` it stays open, without `stroke` it has no outline. */
export interface Paint {
  fill?: string | undefined
  opacity?: number | undefined
  stroke?: Stroke | undefined
}

export const markerShapes = ['circle', 'square', 'triangle', 'diamond', 'cross', 'plus', 'left', 'right'] as const
/** `left` and `right` are triangles that point that way; `cross` and `plus` are lines only. */
export type MarkerShape = (typeof markerShapes)[number]

/** A stretch of text with its own size and tone, so that units can be set small. */
export interface TextRun {
  text: string
  size?: number
  colour?: string
  /** Room before the run. A space would do on a canvas, but SVG readers differ in what they make of leading spaces. */
  gap?: number
}
export type Label = string | readonly TextRun[]

export interface TextStyle {
  size: number
  colour: string
  anchor?: 'start' | 'middle' | 'end'
  baseline?: 'top' | 'middle' | 'alphabetic' | 'bottom'
  /** Degrees clockwise about the anchor point. */
  rotation?: number
  weight?: 'normal' | 'bold'
  /** Drawn behind the letters, so that text stays legible over the sediment. */
  halo?: string | undefined
}

/** A bitmap: drawn on a canvas from `source`, written to a figure by `href` (a data URL). */
export interface Picture {
  readonly width: number
  readonly height: number
  readonly source?: CanvasImageSource | undefined
  readonly href?: string | undefined
}

/** `hatch`: diagonal lines (event beds); `stipple`: dots (unreadable stretches); `rule`: level lines (hiatus). */
export type Texture = 'hatch' | 'stipple' | 'rule'

/**
 * What painters draw on. A canvas, a figure in SVG, or a test stands behind it; a painter never knows which.
 * Level and upright hairlines are moved to whole device pixels where there are such, so painters need not round.
 */
export interface Surface {
  /** Device pixels per unit: how fine a picture has to be, how thin a row can be told apart. */
  readonly pixelRatio: number
  line(x1: number, y1: number, x2: number, y2: number, stroke: Stroke): void
  /** Many separate lines in one stroke: x1, y1, x2, y2 for each. */
  lines(ends: ArrayLike<number>, stroke: Stroke): void
  /** x, y of each vertex; a NaN lifts the pen. */
  polyline(points: ArrayLike<number>, stroke: Stroke): void
  /** x, y of each vertex, closed. */
  polygon(points: ArrayLike<number>, paint: Paint): void
  rect(frame: Frame, paint: Paint): void
  /** `size` is the diameter of the circle; the other shapes are matched to it by eye. */
  marker(shape: MarkerShape, x: number, y: number, size: number, paint: Paint): void
  text(label: Label, x: number, y: number, style: TextStyle): void
  /** Width of a label set at a size, surface units. */
  measure(label: Label, size: number, weight?: 'normal' | 'bold'): number
  /** `phase` moves the texture along y, so that it scrolls with what it lies on. */
  texture(frame: Frame, texture: Texture, colour: string, phase?: number): void
  /** The part [x, x + width) by [y, y + height) of a picture into a frame. `smooth: false` shows single pixels. */
  image(picture: Picture, part: Frame, into: Frame, smooth: boolean): void
  clip(frame: Frame, draw: () => void): void
  /** Names a part of the drawing; kept in a figure's structure, ignored by a canvas. */
  group(name: string, draw: () => void): void
}

/** Every painter has this form: it reads no store, keeps no state, and draws whatever it is given. */
export type Painter<Data> = (surface: Surface, frame: Frame, data: Data, theme: Theme) => void
