/**
 * Lettering by strokes: each character is a few polylines on a grid 4 wide and 6 high (y down), drawn with a round pen.
 * Enough for the ruler's figures and the label on the liner.
 */
type Stroke = [number, number][]

function arc(cx: number, cy: number, rx: number, ry: number, from: number, to: number): Stroke {
  const points: Stroke = []
  const steps = 14
  for (let i = 0; i <= steps; i++) {
    const angle = ((from + ((to - from) * i) / steps) * Math.PI) / 180
    points.push([cx + rx * Math.cos(angle), cy + ry * Math.sin(angle)])
  }
  return points
}

const glyphs: Record<string, Stroke[]> = {
  '0': [arc(2, 3, 1.8, 3, 0, 360)],
  '1': [
    [
      [0.8, 1.2],
      [2.2, 0],
      [2.2, 6],
    ],
  ],
  '2': [[...arc(2, 1.8, 1.8, 1.8, 190, 395), [0.2, 6], [3.9, 6]]],
  '3': [[...arc(1.9, 1.6, 1.6, 1.6, 200, 440)], [...arc(1.9, 4.4, 1.8, 1.6, 275, 520)]],
  '4': [
    [
      [3, 6],
      [3, 0],
      [0.1, 4.2],
      [3.9, 4.2],
    ],
  ],
  '5': [[[3.6, 0], [0.7, 0], [0.4, 2.7], ...arc(1.9, 4.1, 1.8, 1.9, 235, 510)]],
  '6': [[[3, 0], ...arc(2, 4.1, 1.8, 1.9, 190, 560)]],
  '7': [
    [
      [0.1, 0],
      [3.8, 0],
      [1.5, 6],
    ],
  ],
  '8': [arc(2, 1.5, 1.5, 1.5, 0, 360), arc(2, 4.4, 1.8, 1.6, 0, 360)],
  '9': [[...arc(2, 1.9, 1.8, 1.9, 370, 0), [3.6, 3], [1.2, 6]]],
  A: [
    [
      [0, 6],
      [2, 0],
      [4, 6],
    ],
    [
      [0.7, 4],
      [3.3, 4],
    ],
  ],
  K: [
    [
      [0.3, 0],
      [0.3, 6],
    ],
    [
      [3.8, 0],
      [0.4, 3.4],
      [3.9, 6],
    ],
  ],
  S: [[...arc(2, 1.5, 1.7, 1.5, 330, 90), ...arc(2, 4.5, 1.8, 1.5, 270, 510)]],
  c: [arc(2.1, 4.3, 1.6, 1.7, 320, 40)],
  m: [
    [
      [0.1, 6],
      [0.1, 2.7],
    ],
    [[0.1, 3.6], ...arc(1.1, 3.7, 0.9, 1, 200, 360), [2, 6]],
    [[2, 3.7], ...arc(2.95, 3.7, 0.95, 1, 200, 360), [3.9, 6]],
  ],
  '-': [
    [
      [0.6, 3.3],
      [3.4, 3.3],
    ],
  ],
}

function distanceToSegment(px: number, py: number, ax: number, ay: number, bx: number, by: number): number {
  const dx = bx - ax
  const dy = by - ay
  const length = dx * dx + dy * dy
  const t = length === 0 ? 0 : Math.min(1, Math.max(0, ((px - ax) * dx + (py - ay) * dy) / length))
  return Math.hypot(px - ax - t * dx, py - ay - t * dy)
}

/** A coverage mask [height x width], 0 to 1. */
export interface Mask {
  width: number
  height: number
  cover: Float32Array
}

/** Draws one polyline with a round pen of the given diameter into the mask, anti-aliased. */
export function drawStroke(mask: Mask, stroke: Stroke, pen: number): void {
  for (let k = 0; k + 1 < stroke.length; k++) {
    const [ax, ay] = stroke[k]
    const [bx, by] = stroke[k + 1]
    const reach = pen / 2 + 1
    const x0 = Math.max(0, Math.floor(Math.min(ax, bx) - reach))
    const x1 = Math.min(mask.width - 1, Math.ceil(Math.max(ax, bx) + reach))
    const y0 = Math.max(0, Math.floor(Math.min(ay, by) - reach))
    const y1 = Math.min(mask.height - 1, Math.ceil(Math.max(ay, by) + reach))
    for (let y = y0; y <= y1; y++) {
      for (let x = x0; x <= x1; x++) {
        const cover = Math.min(1, Math.max(0, pen / 2 + 0.5 - distanceToSegment(x + 0.5, y + 0.5, ax, ay, bx, by)))
        const at = y * mask.width + x
        mask.cover[at] = Math.max(mask.cover[at], cover)
      }
    }
  }
}

/** Writes a text with its top left at (x, y); `size` is the height of a figure in pixels. */
export function drawText(mask: Mask, text: string, x: number, y: number, size: number, pen: number): void {
  const unit = size / 6
  let left = x
  for (const character of text) {
    for (const stroke of glyphs[character] ?? []) {
      drawStroke(
        mask,
        stroke.map(([u, v]): [number, number] => [left + u * unit, y + v * unit]),
        pen,
      )
    }
    left += 5.4 * unit
  }
}

/** Width of a text in pixels. */
export function textWidth(text: string, size: number): number {
  return (5.4 * text.length - 1.4) * (size / 6)
}
