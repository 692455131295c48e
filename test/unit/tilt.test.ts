import { describe, expect, it } from 'vitest'
import { extractProfile } from '../../worker/core/profile.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import type { ScanShape } from '../../worker/core/scan.ts'
import { defaultTransect, type Transect } from '../../worker/core/transect.ts'
import { scanPixels, type Point } from '../../worker/units.ts'
import { seededRandom } from '../../worker/random.ts'
import { drawProfile, usualProfile } from '../fixtures/drawnProfile.ts'
import { runOnSamples } from '../fixtures/runOnSamples.ts'

const degrees = Math.PI / 180
const shape: ScanShape = { width: 160, height: 1100, channels: 1, bits: 8 }
const point = (x: number, y: number): Point => ({ x: scanPixels(x), y: scanPixels(y) })

/** Layers on a scan, falling to the right by a slope that may change downcore. */
function drawBeds(slopeAt: (y: number) => number, thickness: number, grain: number, seed: number): Uint8Array {
  const years = Math.ceil((2.2 * shape.height) / thickness)
  const rules = { ...usualProfile, years, thicknessTop: thickness, thicknessBase: thickness }
  const { intensity } = drawProfile(rules, seed)
  const random = seededRandom(seed)
  return Uint8Array.from({ length: shape.width * shape.height }, (_, i) => {
    const x = (i % shape.width) + 0.5 - shape.width / 2
    const y = Math.floor(i / shape.width) + 0.5
    const depth = 0.3 * shape.height + y - x * slopeAt(y)
    const row = Math.floor(depth)
    const value = intensity[row] + (depth - row) * (intensity[row + 1] - intensity[row])
    return Math.max(0, Math.min(255, Math.round(value + grain * random.normal())))
  })
}

function tiltOf(data: Uint8Array, transect: Transect): number[] {
  const work = extractProfile(shape, transect, defaultRecipe.profile)
  return Array.from(runOnSamples(work, data, shape.width, 1).result.tilt, (tilt) => tilt / degrees)
}

const path = defaultTransect(shape, { axis: 'y', young: 'low' })
const middle = (values: number[]) => values.toSorted((a, b) => a - b)[values.length >> 1]

describe('the bedding tilt, estimated from the image', () => {
  for (const tilt of [-12, -3, 0, 7, 12]) {
    for (const thickness of [5, 20, 60]) {
      it(`is ${tilt} degrees within 0.2 for layers of ${thickness} px under grain`, () => {
        const found = tiltOf(
          drawBeds(() => Math.tan(tilt * degrees), thickness, 8, 7 + thickness),
          path,
        )
        for (const at of found) expect(Math.abs(at - tilt)).toBeLessThan(0.2)
      })
    }
  }

  it('follows beds that steepen down the core', () => {
    const slopeAt = (y: number) => Math.tan((-2 + (10 * y) / shape.height) * degrees)
    const found = tiltOf(drawBeds(slopeAt, 15, 8, 3), path)
    for (const row of [250, 550, 850]) expect(Math.abs(found[row] - (-2 + (10 * row) / shape.height))).toBeLessThan(0.7)
  })

  it('is measured against the perpendicular of the path, on an oblique one too', () => {
    const data = drawBeds(() => Math.tan(4 * degrees), 15, 8, 5)
    // The path leans by 6 degrees to the right of straight down: its perpendicular rises to the right by as much.
    const lean = Math.tan(6 * degrees)
    const points = [point(45, 100), point(45 + lean * 900, 1000)]
    const found = tiltOf(data, { points, width: scanPixels(60), tilt: null, masks: [] })
    expect(Math.abs(middle(found) - 10)).toBeLessThan(0.3)
  })

  it('is not led astray by a crack down the core or by its edge', () => {
    const data = drawBeds(() => Math.tan(5 * degrees), 20, 8, 9)
    for (let y = 0; y < shape.height; y++) {
      for (let x = 60; x < 64; x++) data[y * shape.width + x] = 10
      for (let x = 145; x < shape.width; x++) data[y * shape.width + x] = 250
    }
    expect(Math.abs(middle(tiltOf(data, { ...path, width: scanPixels(140) })) - 5)).toBeLessThan(0.4)
  })

  it('is 0 where nothing shows any bedding', () => {
    expect(tiltOf(new Uint8Array(shape.width * shape.height).fill(128), path).every((tilt) => tilt === 0)).toBe(true)
  })

  it('never exceeds 15 degrees', () => {
    const found = tiltOf(
      drawBeds(() => Math.tan(25 * degrees), 20, 12, 11),
      path,
    )
    for (const tilt of found) expect(Math.abs(tilt)).toBeLessThanOrEqual(15.01)
  })
})
