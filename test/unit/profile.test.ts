import { describe, expect, it } from 'vitest'
import { extractProfile, type Profile, type ProfileRecipe } from '../../worker/core/profile.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import type { ScanShape } from '../../worker/core/scan.ts'
import { defaultTransect, type Transect } from '../../worker/core/transect.ts'
import { seededRandom } from '../../worker/random.ts'
import { scanPixels, type Point } from '../../worker/units.ts'
import { runOnSamples } from '../fixtures/runOnSamples.ts'

const point = (x: number, y: number): Point => ({ x: scanPixels(x), y: scanPixels(y) })
const recipe: ProfileRecipe = defaultRecipe.profile

function profileOf(
  data: Uint8Array | Uint16Array,
  shape: ScanShape,
  transect: Transect,
  changes: Partial<ProfileRecipe> = {},
): Profile {
  const work = extractProfile(shape, transect, { ...recipe, ...changes })
  return runOnSamples(work, data, shape.width, shape.channels).result
}

/** Grey noise, so that every pixel counts. */
function noise(width: number, height: number, channels = 1, seed = 1): Uint8Array {
  const random = seededRandom(seed)
  return Uint8Array.from({ length: width * height * channels }, () => random.below(256))
}

const sortedMiddle = (values: number[]) => {
  const sorted = values.toSorted((a, b) => a - b)
  const half = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2
}

describe('the profile of a straight transect', () => {
  const shape: ScanShape = { width: 90, height: 300, channels: 1, bits: 8 }
  const data = noise(90, 300)
  const level = { ...defaultTransect(shape, { axis: 'y', young: 'low' }), tilt: 0 }

  it('is the median of the very pixels of each row across the width', () => {
    const { intensity, usable } = profileOf(data, shape, level)
    expect(intensity.length).toBe(300)
    for (let row = 0; row < 300; row++) {
      expect(intensity[row]).toBe(sortedMiddle([...data.subarray(row * 90 + 15, row * 90 + 75)]))
      expect(usable[row]).toBe(1)
    }
  })

  it('is the mean, or the mean without a fifth at either end, where the recipe says so', () => {
    const row = [...data.subarray(15, 75)].toSorted((a, b) => a - b)
    const mean = (values: number[]) => values.reduce((sum, value) => sum + value, 0) / values.length
    expect(profileOf(data, shape, level, { across: 'mean' }).intensity[0]).toBeCloseTo(mean(row), 10)
    expect(profileOf(data, shape, level, { across: 'trimmed' }).intensity[0]).toBeCloseTo(mean(row.slice(12, 48)), 10)
  })

  it('has lanes side by side from left to right, each the mean of its pixels', () => {
    const { lanes, laneCount } = profileOf(data, shape, level, { lanes: 4 })
    expect(laneCount).toBe(4)
    const second = data.subarray(7 * 90 + 30, 7 * 90 + 45)
    expect(lanes[7 * 4 + 1]).toBeCloseTo(second.reduce((sum, value) => sum + value, 0) / 15, 4)
    expect(profileOf(data, shape, { ...level, width: scanPixels(2) }, { lanes: 9 }).laneCount).toBe(2)
  })

  it('is the same whichever way the core lies in its scan', () => {
    const turned = new Uint8Array(data.length)
    for (let y = 0; y < 300; y++) for (let x = 0; x < 90; x++) turned[(89 - x) * 300 + y] = data[y * 90 + x]
    const lying: ScanShape = { ...shape, width: 300, height: 90 }
    const found = profileOf(turned, lying, { ...defaultTransect(lying, { axis: 'x', young: 'low' }), tilt: 0 })
    const upright = profileOf(data, shape, level)
    expect(found.intensity).toEqual(upright.intensity)
    expect(found.lanes).toEqual(upright.lanes)
  })

  it('keeps 16-bit values to the last bit', () => {
    const deep = Uint16Array.from(data, (value, i) => 33_000 + value * 19 + (i % 7))
    const { intensity } = profileOf(deep, { ...shape, bits: 16 }, level)
    expect(intensity[123]).toBe(sortedMiddle([...deep.subarray(123 * 90 + 15, 123 * 90 + 75)]))
  })

  it('takes in the pixel rows between its ends, moved by a fraction where it starts inside a pixel', () => {
    const points = [point(45, 10), point(45, 20)]
    expect(profileOf(data, shape, { ...level, points }).intensity).toEqual(
      profileOf(data, shape, level).intensity.slice(10, 20),
    )
    const ramp = Uint8Array.from({ length: 90 * 300 }, (_, i) => Math.floor(i / 90) % 256)
    const shifted = [point(45, 10.25), point(45, 20.25)]
    expect(profileOf(ramp, shape, { ...level, points: shifted }).intensity[3]).toBeCloseTo(13.25, 5)
  })
})

describe('a tilted or oblique transect', () => {
  // Intensity falls by 0.1 a pixel downcore along beds that dip to the right by 0.1 pixel a pixel.
  const shape: ScanShape = { width: 200, height: 400, channels: 1, bits: 16 }
  const dip = 0.1
  const data = Uint16Array.from({ length: 200 * 400 }, (_, i) => {
    const x = (i % 200) + 0.5 - 100
    const y = Math.floor(i / 200) + 0.5
    return 30_000 + 40 * (y - dip * x)
  })

  it('follows the beds when sheared along their tilt: all lanes agree', () => {
    const transect = { ...defaultTransect(shape, { axis: 'y', young: 'low' }), tilt: Math.atan(dip) }
    const { intensity, lanes, laneCount, tilt } = profileOf(data, shape, transect)
    for (let row = 20; row < 380; row += 40) {
      expect(intensity[row]).toBeCloseTo(30_000 + 40 * (row + 0.5), 0)
      for (let lane = 0; lane < laneCount; lane++) {
        expect(Math.abs(lanes[row * laneCount + lane] - intensity[row])).toBeLessThan(1)
      }
      expect(tilt[row]).toBeCloseTo(Math.atan(dip), 6)
    }
  })

  it('leaves out pixels beyond the scan at its ends', () => {
    const transect = { ...defaultTransect(shape, { axis: 'y', young: 'low' }), tilt: Math.atan(dip) }
    const { usable, intensity } = profileOf(data, shape, transect)
    expect(usable[0]).toBeGreaterThan(0.4)
    expect(usable[0]).toBeLessThan(0.6)
    expect(usable[200]).toBe(1)
    expect(Number.isFinite(intensity[0])).toBe(true)
  })

  it('reads an oblique path by interpolation between pixels', () => {
    const points = [point(60, 50), point(140, 350)]
    const { intensity } = profileOf(
      data,
      shape,
      { points, width: scanPixels(21), tilt: 0, masks: [] },
      { across: 'mean' },
    )
    const length = Math.hypot(80, 300)
    expect(intensity.length).toBe(Math.floor(length))
    for (const row of [0, 100, 250]) {
      const share = (row + 0.5) / length
      expect(intensity[row]).toBeCloseTo(30_000 + 40 * (50 + 300 * share - dip * (60 + 80 * share - 100)), 0)
    }
  })

  it('goes round a corner without a jump', () => {
    const points = [point(80, 30), point(90, 200), point(130, 370)]
    const { intensity } = profileOf(data, shape, { points, width: scanPixels(15), tilt: null, masks: [] })
    for (let row = 1; row < intensity.length; row++) {
      expect(Math.abs(intensity[row] - intensity[row - 1] - 40)).toBeLessThan(12)
    }
  })
})

describe('channels', () => {
  const shape: ScanShape = { width: 4, height: 6, channels: 3, bits: 8 }
  const data = Uint8Array.from({ length: 4 * 6 * 3 }, (_, i) => [200, 100, 50][i % 3])
  const transect: Transect = { points: [point(2, 0), point(2, 6)], width: scanPixels(4), tilt: 0, masks: [] }
  const value = (changes: Partial<ProfileRecipe>) => profileOf(data, shape, transect, changes).intensity[2]

  it('are luminance, lightness, or one of the three', () => {
    expect(value({ channel: 'luminance' })).toBeCloseTo(117.65, 4)
    expect(value({ channel: 'red' })).toBe(200)
    expect(value({ channel: 'green' })).toBe(100)
    expect(value({ channel: 'blue' })).toBe(50)
    // L* of sRGB (200, 100, 50), worked out with numpy from the D65 matrix.
    expect(value({ channel: 'lightness' })).toBeCloseTo(53.6295, 3)
  })

  it('undo the transfer curve on request, in the units of the file', () => {
    expect(value({ channel: 'green', linear: true })).toBeCloseTo(255 * 0.12743768, 4)
  })

  it('are the grey value itself for grey scans, alpha left aside', () => {
    const grey = Uint8Array.from({ length: 4 * 6 * 2 }, (_, i) => (i % 2 === 0 ? 77 : 0))
    for (const channel of ['luminance', 'red', 'blue'] as const) {
      expect(profileOf(grey, { ...shape, channels: 2 }, transect, { channel }).intensity[3]).toBe(77)
    }
  })
})

describe('masks', () => {
  const shape: ScanShape = { width: 100, height: 200, channels: 1, bits: 8 }
  const data = new Uint8Array(100 * 200).fill(90)
  // A label of 255 over rows 40-60, columns 0-70.
  for (let y = 40; y < 60; y++) data.fill(255, y * 100, y * 100 + 70)
  const label = [point(0, 40), point(70, 40), point(70, 60), point(0, 60)]
  const transect = { ...defaultTransect(shape, { axis: 'y', young: 'low' }), tilt: 0 }

  it('leave their pixels out, and nothing more', () => {
    expect(profileOf(data, shape, transect).intensity[50]).toBe(255)
    const { intensity, usable } = profileOf(data, shape, { ...transect, masks: [label] }, { usableShare: 0.1 })
    expect(intensity.every((value) => value === 90)).toBe(true)
    // 66 columns from 17 to 83; the label covers 17 to 70.
    expect(usable[50]).toBeCloseTo(13 / 66, 6)
    expect(usable[39]).toBe(1)
    expect(usable[60]).toBe(1)
  })

  it('make a row unreadable that keeps too few pixels, never a guess', () => {
    const { intensity, lanes, laneCount } = profileOf(data, shape, { ...transect, masks: [label] })
    for (let row = 0; row < 200; row++) expect(Number.isNaN(intensity[row])).toBe(row >= 40 && row < 60)
    expect(Number.isNaN(lanes[50 * laneCount])).toBe(true)
    expect(lanes[50 * laneCount + laneCount - 1]).toBe(90)
  })

  it('count by the even-odd rule, beyond the scan too', () => {
    const ring = [point(-50, 90), point(150, 90), point(150, 110), point(-50, 110)]
    const { intensity } = profileOf(data, shape, { ...transect, masks: [ring] })
    expect(intensity.findIndex((value) => Number.isNaN(value))).toBe(90)
    expect(intensity.filter((value) => Number.isNaN(value)).length).toBe(20)
  })
})

describe('extractProfile', () => {
  const shape: ScanShape = { width: 60, height: 80, channels: 1, bits: 8 }
  const transect = defaultTransect(shape, { axis: 'y', young: 'low' })
  const start = (changes: object, path = transect) => extractProfile(shape, path, { ...recipe, ...changes }).next()

  it('names what is wrong with a recipe or a transect', () => {
    expect(() => start({ channel: 'ultraviolet' })).toThrow(
      'recipe.profile.channel must be one of luminance, lightness, red, green, blue; it is "ultraviolet"',
    )
    expect(() => start({ lanes: 0 })).toThrow('recipe.profile.lanes must be a whole number from 1 to 1000; it is 0')
    expect(() => start({ usableShare: NaN })).toThrow('recipe.profile.usableShare must be between 0 and 1; it is NaN')
    expect(() => start({ linear: 1 })).toThrow('recipe.profile.linear must be true or false; it is 1')
    expect(() => start({}, { ...transect, points: [] })).toThrow('transect.points must have at least 2 points')
  })

  it('gives the same profile from many small bands as from one large', () => {
    const tall: ScanShape = { width: 3000, height: 3400, channels: 1, bits: 8 }
    const data = new Uint8Array(3000 * 3400)
    for (let i = 0; i < data.length; i++) data[i] = Math.imul(i, 0x9e3779b1) >>> 24
    const path = [point(1500, 0), point(1500, 3400)]
    const wide: Transect = { points: path, width: scanPixels(2600), tilt: 0, masks: [] }
    const { result: whole, regions } = runOnSamples(extractProfile(tall, wide, recipe), data, 3000, 1)
    expect(regions.length).toBeGreaterThan(2)
    const short = { ...wide, points: [point(1500, 1500), point(1500, 1800)] }
    const part = profileOf(data, tall, short)
    expect(part.intensity).toEqual(whole.intensity.slice(1500, 1800))
  })
})
