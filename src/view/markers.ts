import type { MarkerShape } from './surface.ts'

/** Corners of a marker about the origin for a diameter of 1, x and y in turn; the sizes look alike beside a circle. */
const corners: Record<Exclude<MarkerShape, 'circle' | 'cross' | 'plus'>, readonly number[]> = {
  square: [-0.45, -0.45, 0.45, -0.45, 0.45, 0.45, -0.45, 0.45],
  diamond: [0, -0.62, 0.62, 0, 0, 0.62, -0.62, 0],
  triangle: [0, -0.6, 0.56, 0.4, -0.56, 0.4],
  left: [-0.6, 0, 0.4, -0.56, 0.4, 0.56],
  right: [0.6, 0, -0.4, 0.56, -0.4, -0.56],
}

/** Ends of the two lines of a cross, likewise. */
const strokes: Record<'cross' | 'plus', readonly number[]> = {
  cross: [-0.42, -0.42, 0.42, 0.42, -0.42, 0.42, 0.42, -0.42],
  plus: [-0.55, 0, 0.55, 0, 0, -0.55, 0, 0.55],
}

const placed = (values: readonly number[], x: number, y: number, size: number) =>
  values.map((value, i) => (i % 2 === 0 ? x : y) + value * size)

export function markerCorners(shape: keyof typeof corners, x: number, y: number, size: number): number[] {
  return placed(corners[shape], x, y, size)
}

export function markerStrokes(shape: keyof typeof strokes, x: number, y: number, size: number): number[] {
  return placed(strokes[shape], x, y, size)
}
