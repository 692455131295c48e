import { seededRandom } from '../worker/random.ts'
import { valueAt, type Columns } from './columns.ts'
import { depthAt, layout, tiltAt, type ErosiveBase } from './deformation.ts'
import { grain, noise1, noise2 } from './noise.ts'
import { drawSurroundings } from './surroundings.ts'

/** Samples a pixel: red, green, blue; [height x width x 3], 0 to 255 before rounding. */
export interface Picture {
  width: number
  height: number
  rgb: Float32Array
}

/** Where the crack runs: between these path pixels on the middle line. */
export interface Crack {
  from: number
  to: number
}

/** Colours of light silt and dark clay down the core: the lake browned when its catchment was cleared. */
const palette = [
  { x: 0, silt: [139, 128, 98], clay: [56, 48, 36] },
  { x: 1700, silt: [146, 134, 104], clay: [63, 55, 43] },
  { x: 3600, silt: [144, 141, 118], clay: [70, 68, 56] },
  { x: 5900, silt: [142, 142, 124], clay: [72, 71, 62] },
  { x: 7600, silt: [152, 141, 121], clay: [77, 67, 56] },
  { x: 9300, silt: [145, 146, 136], clay: [73, 74, 70] },
  { x: 12000, silt: [138, 143, 138], clay: [67, 71, 70] },
]

function paletteAt(x: number): { silt: number[]; clay: number[] } {
  let k = 0
  while (k + 2 < palette.length && palette[k + 1].x < x) k++
  const a = palette[k]
  const b = palette[k + 1]
  const t = Math.min(1, Math.max(0, (x - a.x) / (b.x - a.x)))
  const mix = (p: number[], q: number[]) => p.map((value, i) => value + (q[i] - value) * t)
  return { silt: mix(a.silt, b.silt), clay: mix(a.clay, b.clay) }
}

/** Lamps and wetness: darker towards the sides, drifting along the core, one lamp a little stronger. */
function light(x: number, y: number): number {
  const across = (y - layout.middle) / 236
  const along = 0.06 * noise1(x / 2300 + 7.7, 31) + 0.025 * noise1(x / 520, 32)
  return (1 - 0.11 * across * across + 0.05 * across) * (1.0 + along) * (1 + 0.035 * noise2(x / 240, y / 170, 33))
}

/** Everything the knife and the drying surface leave on the sediment, in grey levels. */
function surface(x: number, y: number, coarse: number): number {
  // Scraping runs across the core but not along the bedding.
  const scraped = x + 0.035 * (y - layout.middle)
  const streaks = 3.2 * noise2(scraped / 1.7, y / 150, 34) + 2 * noise2(scraped / 5.5, y / 260, 35)
  const blotches = 4.5 * noise2(x / 55, y / 48, 36) + 4 * noise2(x / 14, y / 19, 37)
  const granular = (0.6 + 0.9 * coarse) * (5 * noise2(x / 3.1, y / 3.1, 38) + 4.2 * noise2(x / 1.6, y / 1.6, 39))
  return streaks + blotches + granular
}

/** The sediment's own colour at a pixel into `out`. */
function sedimentColour(columns: Columns, x: number, y: number, depth: number, out: number[]): void {
  const coarse = valueAt(columns.coarseness, depth)
  // Laminae thin out and thicken sideways: their contrast varies in flat lenses along the bedding.
  const lens = 0.96 + 0.3 * noise2(depth / 9, y / 80, 40) + 0.26 * noise2(depth / 3.5, y / 27, 41)
  const band = 0.09 * noise1(depth / 210, 42) + (depth < 2600 ? 0.1 * Math.max(0, noise1(depth / 130, 43)) : 0)
  const dark = 0.42 + (valueAt(columns.darkness, depth) - 0.42) * lens + band
  const oxidised = Math.max(0, noise2(depth / 26, y / 120, 47) + 0.5 * noise2(x / 70, y / 45, 48) - 0.7)
  const tint = valueAt(columns.tint, depth) + 0.5 * oxidised
  const ash = valueAt(columns.ash, depth)
  const { silt, clay } = paletteAt(x)
  const textured = surface(x, y, coarse)
  for (let c = 0; c < 3; c++) {
    let value = silt[c] + (clay[c] - silt[c]) * dark
    value += tint * (c === 0 ? 14 : c === 1 ? (tint > 0 ? 3 : -5) : -9)
    value += ash * ([166, 163, 153][c] * (1 - 0.3 * dark) - value) * 0.8
    out[c] = value + textured * (c === 2 ? 0.9 : 1)
  }
}

/** Plant fragments, sand grains and glints of the wet surface. */
function drawSpecks(picture: Picture, seed: number): void {
  const random = seededRandom(seed)
  for (let k = 0; k < 1500; k++) {
    const bright = random.uniform() < 0.45
    const cx = random.uniform() * picture.width
    const cy = layout.sedimentFrom + 10 + random.uniform() * (layout.sedimentTo - layout.sedimentFrom - 20)
    const long = bright ? 0.7 + 0.9 * random.uniform() : 0.9 + 3.6 * random.uniform() ** 3
    const short = bright ? long : 0.7 + 0.9 * random.uniform()
    const strength = bright ? 26 + 46 * random.uniform() ** 2 : -(18 + 26 * random.uniform())
    const angle = Math.PI / 2 - tiltAt(cx) + 0.4 * random.normal()
    for (let y = Math.floor(cy - 8); y <= cy + 8; y++) {
      for (let x = Math.max(0, Math.floor(cx - 8)); x <= Math.min(picture.width - 1, cx + 8); x++) {
        const u = ((x - cx) * Math.cos(angle) + (y - cy) * Math.sin(angle)) / long
        const v = ((y - cy) * Math.cos(angle) - (x - cx) * Math.sin(angle)) / short
        const amount = strength * Math.exp(-(u * u + v * v))
        for (let c = 0; c < 3; c++) picture.rgb[(y * picture.width + x) * 3 + c] += amount
      }
    }
  }
}

/** Scratches of the cleaning knife: long, thin, in any direction that a wrist allows. */
function drawScratches(picture: Picture, seed: number): void {
  const random = seededRandom(seed)
  for (let k = 0; k < 150; k++) {
    const length = 40 + 260 * random.uniform() ** 2
    const angle = Math.PI / 2 + 0.5 * random.normal()
    const cx = random.uniform() * picture.width
    const cy = layout.sedimentFrom + random.uniform() * (layout.sedimentTo - layout.sedimentFrom)
    const bend = 0.0012 * random.normal()
    const strength = 11 * random.normal()
    for (let t = -length / 2; t < length / 2; t += 0.5) {
      const x = cx + t * Math.cos(angle) + bend * t * t
      const y = Math.floor(cy + t * Math.sin(angle))
      const amount = 0.5 * strength * (1 - (2 * t) / length) * (1 + (2 * t) / length)
      if (y < layout.sedimentFrom || y >= layout.sedimentTo) continue
      for (let ix = Math.max(0, Math.floor(x - 2)); ix <= Math.min(picture.width - 1, x + 2); ix++) {
        // The furrow's far side lies in shade.
        const d = ix + 0.5 - x
        const furrow = amount * (Math.exp(-((d / 0.9) ** 2)) - 0.6 * Math.exp(-(((d - 1.5) / 0.9) ** 2)))
        for (let c = 0; c < 3; c++) picture.rgb[(y * picture.width + ix) * 3 + c] += furrow
      }
    }
  }
}

/** A drying crack: dark inside, its lower lip catching the light. */
function drawCrack(picture: Picture, crack: Crack): void {
  const middle = (crack.from + crack.to) / 2
  for (let y = layout.sedimentFrom; y < layout.sedimentTo; y++) {
    const along = (y - layout.sedimentFrom) / (layout.sedimentTo - layout.sedimentFrom)
    const wander = 5 * noise1(y / 62, 51) + 2.6 * noise1(y / 13, 52) + 1.3 * noise1(y / 4, 56)
    const at = middle + Math.tan(0.03) * (y - layout.middle) + wander
    const ragged = 0.75 + 0.35 * noise1(y / 40, 53) + 0.2 * noise1(y / 7, 57)
    const half = 4.4 * Math.min(1, 6 * along) * ragged * Math.min(1, 2.6 * (1.12 - along))
    for (let x = Math.floor(at - 14); x <= at + 14; x++) {
      const d = x + 0.5 - at
      const inside = Math.min(1, Math.max(0, half - Math.abs(d) + 0.6))
      const lip = Math.exp(-(((d - half - 1.6) / 1.5) ** 2)) * Math.min(1, half / 2)
      for (let c = 0; c < 3; c++) {
        const i = (y * picture.width + x) * 3 + c
        picture.rgb[i] = picture.rgb[i] * (1 - 0.93 * inside) + [20, 17, 14][c] * inside + 20 * lip * (1 - inside)
      }
    }
  }
}

/** A pebble that fell from the lake ice, with its shadow. */
function drawPebble(picture: Picture, cx: number, cy: number, radius: number): void {
  for (let y = Math.floor(cy - 2 * radius); y < cy + 2 * radius; y++) {
    for (let x = Math.floor(cx - 2 * radius); x < cx + 2 * radius; x++) {
      const rim = radius * (1 + 0.12 * noise1(Math.atan2(y - cy, x - cx) * 1.6 + 9, 54))
      const d = Math.hypot(x - cx, (y - cy) * 1.25)
      const inside = Math.min(1, Math.max(0, rim - d + 0.5))
      const shadow = 0.4 * Math.exp(-(((d - rim) / 3) ** 2)) * (y > cy ? 1 : 0.4)
      const shade = 1 - 0.35 * ((x - cx + (y - cy)) / (2 * radius)) + 0.1 * noise2(x / 3, y / 3, 55)
      for (let c = 0; c < 3; c++) {
        const i = (y * picture.width + x) * 3 + c
        const stone = [112, 106, 101][c] * shade
        picture.rgb[i] = picture.rgb[i] * (1 - inside) * (1 - shadow * (1 - inside)) + stone * inside
      }
    }
  }
}

/** Draws the photograph of the split core with liner, label and ruler. */
export function drawPhotograph(columns: Columns, bases: ErosiveBase[], width: number, crack: Crack): Picture {
  const { height } = layout
  const picture: Picture = { width, height, rgb: new Float32Array(width * height * 3) }
  const colour = [0, 0, 0]
  for (let y = layout.sedimentFrom - 6; y < layout.sedimentTo + 6; y++) {
    for (let x = 0; x < width; x++) {
      const depth = depthAt(x + 0.5, y + 0.5, bases)
      sedimentColour(columns, x + 0.5, y + 0.5, depth, colour)
      const shade = light(x, y)
      for (let c = 0; c < 3; c++) picture.rgb[(y * width + x) * 3 + c] = colour[c] * shade
    }
  }
  drawPebble(picture, 3905, 196, 15)
  drawSpecks(picture, 77)
  drawScratches(picture, 78)
  drawCrack(picture, crack)
  drawSurroundings(picture)
  for (let y = 0; y < height; y++) {
    for (let x = 0; x < width; x++) {
      const shared = 2.6 * grain(x, y, 61)
      for (let c = 0; c < 3; c++) picture.rgb[(y * width + x) * 3 + c] += shared + 1.4 * grain(x, y, 62 + c)
    }
  }
  return picture
}
