import { layout } from './deformation.ts'
import { noise1, noise2 } from './noise.ts'
import type { Picture } from './photograph.ts'
import { drawStroke, drawText, textWidth, type Mask } from './strokes.ts'

/** Everything around the sediment: black felt, the plastic liner, a label, a grey card and a millimetre ruler. */

/** The ruler's zero lies here, and a millimetre is this long. */
export const rulerZero = 38.4
export const pixelsPerMillimetre = 20

const felt = [21, 20, 22]

/** The cut edge of the sediment is never straight, and the knife smears it. */
function drawLiner(picture: Picture): void {
  const { width, height, rgb } = picture
  for (let x = 0; x < width; x++) {
    const ragged = (seed: number) =>
      2.4 * noise1(x / 130, seed) + 2 * noise1(x / 24, seed + 1) + noise1(x / 5, seed + 2)
    const upper = layout.sedimentFrom + 1.5 + ragged(71)
    const lower = layout.sedimentTo - 1.5 - ragged(83)
    for (let y = 0; y < height; y++) {
      const depthInside = Math.min(y - upper, lower - y)
      const i = (y * width + x) * 3
      if (depthInside > 0) {
        const smear = 0.62 * Math.exp(-depthInside / (7 + 3 * noise1(x / 90, 75)))
        const rounded = 1 - 0.5 * Math.exp(-depthInside / 3.2)
        const paste = 78 + 8 * noise2(x / 40, y / 5, 76)
        for (let c = 0; c < 3; c++) {
          rgb[i + c] = (rgb[i + c] * (1 - smear) + (paste - 7 * c) * smear) * rounded
        }
      } else {
        // The liner is clear plastic 12 px thick: dim, with a bright line where its cut edge catches the lamp.
        const out = Math.max(layout.sedimentFrom - 4 - y, y - layout.sedimentTo - 3)
        const glare = (40 + 22 * noise1(x / 190, 77) + 9 * noise1(x / 17, 79)) * Math.exp(-(((out - 7.5) / 1.7) ** 2))
        const plastic = 36 + 7 * noise1(x / 150, 80) + glare
        for (let c = 0; c < 3; c++) rgb[i + c] = out < 0 ? 13 + 3 * noise1(x / 9, 87) : out < 12 ? plastic + c : felt[c]
      }
    }
  }
}

/** Lays a sheet of some colour over a rectangle, lit unevenly. */
function drawSheet(picture: Picture, x0: number, y0: number, x1: number, y1: number, colour: number[]): void {
  for (let y = y0; y < y1; y++) {
    for (let x = x0; x < x1; x++) {
      const edge = Math.min(1, (Math.min(x - x0, x1 - 1 - x, y - y0, y1 - 1 - y) + 0.5) / 1.6)
      const shade = 1 + 0.05 * noise2(x / 900, y / 60, 81) + 0.02 * noise2(x / 7, y / 7, 82)
      for (let c = 0; c < 3; c++) {
        const i = (y * picture.width + x) * 3 + c
        picture.rgb[i] = picture.rgb[i] * (1 - edge) + colour[c] * shade * edge
      }
    }
  }
}

function stamp(picture: Picture, mask: Mask, top: number, ink: number[]): void {
  for (let y = 0; y < mask.height; y++) {
    for (let x = 0; x < mask.width; x++) {
      const cover = mask.cover[y * mask.width + x]
      if (cover === 0) continue
      for (let c = 0; c < 3; c++) {
        const i = ((y + top) * picture.width + x) * 3 + c
        picture.rgb[i] = picture.rgb[i] * (1 - cover) + ink[c] * cover
      }
    }
  }
}

function drawRuler(picture: Picture): void {
  const { width } = picture
  const height = layout.rulerTo - layout.rulerFrom
  drawSheet(picture, 0, layout.rulerFrom, width, layout.rulerTo, [186, 182, 168])
  const mask: Mask = { width, height, cover: new Float32Array(width * height) }
  for (let mm = 0; rulerZero + mm * pixelsPerMillimetre < width; mm++) {
    const x = rulerZero + mm * pixelsPerMillimetre
    const length = mm % 10 === 0 ? 25 : mm % 5 === 0 ? 18 : 12
    drawStroke(
      mask,
      [
        [x, -2],
        [x, length],
      ],
      mm % 10 === 0 ? 2.6 : 2,
    )
    if (mm % 10 === 0) {
      const text = String(mm / 10)
      drawText(mask, text, x - textWidth(text, 20) / 2, 33, 20, 2.6)
    }
  }
  stamp(picture, mask, layout.rulerFrom, [38, 36, 40])
}

function drawLabel(picture: Picture): void {
  drawSheet(picture, 96, 8, 560, 56, [176, 171, 150])
  const mask: Mask = { width: picture.width, height: 60, cover: new Float32Array(picture.width * 60) }
  drawText(mask, 'ASK19-1', 122, 19, 26, 3.4)
  drawText(mask, '0-47 cm', 348, 21, 23, 3)
  stamp(picture, mask, 0, [34, 38, 62])
}

/** Eight neutral patches, dark to light, for anyone who wants to check the exposure. */
function drawGreyCard(picture: Picture): void {
  for (let k = 0; k < 8; k++) {
    const level = 28 + 27 * k
    drawSheet(picture, 700 + 62 * k, 10, 758 + 62 * k, 54, [level, level, level])
  }
}

export function drawSurroundings(picture: Picture): void {
  drawLiner(picture)
  drawRuler(picture)
  drawLabel(picture)
  drawGreyCard(picture)
}
