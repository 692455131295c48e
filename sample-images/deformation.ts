import { noise1, noise2 } from './noise.ts'

/** Where things are in the photograph, pixels. The core lies along x, young end at x = 0. */
export const layout = { height: 640, sedimentFrom: 84, sedimentTo: 556, middle: 320, rulerFrom: 570, rulerTo: 632 }

/** The erosive bases of the turbidites, filled in from the record: depth before deformation. */
export interface ErosiveBase {
  depth: number
}

/** Bedding tilt in radians, slowly changing along the core: 2 to 4 degrees. */
export function tiltAt(x: number): number {
  return ((2.9 + 0.8 * noise1(x / 2600 + 0.4, 21)) * Math.PI) / 180
}

/** How far the corer dragged the sediment down beside the liner. */
function drag(x: number, y: number): number {
  const above = y - layout.sedimentFrom
  const below = layout.sedimentTo - y
  const upper = Math.exp(-above / (8 + 4 * noise1(x / 390, 22)))
  const lower = Math.exp(-below / (9 + 4.5 * noise1(x / 310 + 0.5, 30)))
  return (24 + 16 * noise1(x / 700, 44)) * upper + (22 + 17 * noise1(x / 560, 45)) * lower
}

/** How much further down a bed lies at (x, y) than where its depth would put it on the middle line. */
export function displacement(x: number, y: number): number {
  const across = y - layout.middle
  const sag = 2.4 * noise2(x / 800, y / 240, 23) + 1.5 * noise2(x / 170, y / 150, 24)
  const fine = noise2(x / 17, y / 90, 25) + 0.7 * noise2(x / 7, y / 26, 26) + 0.45 * noise2(x / 2.6, y / 5, 46)
  // One stretch was disturbed while soft: a gentle fold over a dozen years.
  const fold = 5.5 * Math.exp(-(((x - 4630) / 120) ** 2)) * noise1(y / 75 + 0.3, 27)
  return Math.tan(tiltAt(x)) * across + sag + fine + fold + drag(x, y)
}

/** Depth in the record of the sediment seen at the pixel (x, y). */
export function depthAt(x: number, y: number, bases: ErosiveBase[]): number {
  let depth = x - displacement(x, y)
  for (const base of bases) {
    const d = (depth - base.depth) / 14
    if (d > -3 && d < 3) depth += Math.exp(-d * d) * (4 * noise1(y / 46, 28) + 1.8 * noise1(y / 15, 29))
  }
  return depth
}

/** Where, along row y, the bed of a given depth is seen. */
export function positionOf(depth: number, y: number, bases: ErosiveBase[]): number {
  let x = depth
  for (let i = 0; i < 12; i++) x += depth - depthAt(x, y, bases)
  return x
}
