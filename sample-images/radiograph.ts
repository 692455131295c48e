import { valueAt, type Columns } from './columns.ts'
import { depthAt, layout, type ErosiveBase } from './deformation.ts'
import { grain, noise2 } from './noise.ts'

/** A pixel of the radiograph spans two of the photograph: 0.1 mm. */
export const radiographShrink = 2

/** Grey values of a 12-bit detector in 16 bits, [height x width]. */
export interface Radiograph {
  width: number
  height: number
  grey: Uint16Array
}

/** Attenuation relative to the mean: silt and sand are denser than clay, ash lighter than both. */
function attenuation(columns: Columns, depth: number): number {
  const coarse = valueAt(columns.coarseness, depth)
  const dark = valueAt(columns.darkness, depth)
  return 0.55 * coarse - 0.5 * dark - 0.9 * valueAt(columns.ash, depth)
}

/** Draws the radiograph of the core between two photograph columns: dense light, the half-cylinder thin at its sides. */
export function drawRadiograph(columns: Columns, bases: ErosiveBase[], from: number, to: number): Radiograph {
  const width = Math.floor((to - from) / radiographShrink)
  const top = layout.sedimentFrom - 14
  const height = Math.floor((layout.sedimentTo + 14 - top) / radiographShrink)
  const radius = (layout.sedimentTo - layout.sedimentFrom) / 2
  const grey = new Uint16Array(width * height)
  for (let row = 0; row < height; row++) {
    const y = top + (row + 0.5) * radiographShrink
    const out = Math.abs(y - layout.middle) / radius
    const path = out < 1 ? Math.sqrt(1 - 0.8 * out * out) : 0
    for (let column = 0; column < width; column++) {
      const x = from + (column + 0.5) * radiographShrink
      // The beam blurs over about the pixel; two depths half a pixel apart stand for it.
      const depth = depthAt(x, y, bases)
      const density = (attenuation(columns, depth - 0.6) + attenuation(columns, depth + 0.6)) / 2
      const texture = 0.12 * noise2(x / 12, y / 40, 91) + 0.1 * noise2(x / 4, y / 4, 92)
      const beam = 260 * noise2(x / 1500, y / 400, 93)
      const level = 33_400 + 2600 * path + beam + path * 1150 * (density + texture) + 130 * grain(column, row, 94)
      // A 12-bit detector stored in 16 bits: the lowest four stay empty.
      grey[row * width + column] = Math.round(Math.min(65_520, Math.max(0, level)) / 16) * 16
    }
  }
  return { width, height, grey }
}
