import { describe, expect, it } from 'vitest'
import { regionsOf } from '../../worker/core/bands.ts'
import {
  axisPosition,
  checkTransect,
  defaultTransect,
  distanceAtAxis,
  lengthAlong,
  pathLength,
  pointAt,
  tangentAt,
  type Transect,
} from '../../worker/core/transect.ts'
import type { ScanShape } from '../../worker/core/scan.ts'
import { scanPixels, type Point } from '../../worker/units.ts'

const point = (x: number, y: number): Point => ({ x: scanPixels(x), y: scanPixels(y) })
const shape: ScanShape = { width: 300, height: 1000, channels: 1, bits: 8 }
const along = (...points: Point[]): Transect => ({ points, width: scanPixels(20), tilt: null, masks: [] })

describe('the default transect', () => {
  it('runs down the middle from the young end to the old, over two thirds of the breadth', () => {
    const transect = defaultTransect(shape, { axis: 'y', young: 'low' })
    expect(transect).toEqual({ points: [point(150, 0), point(150, 1000)], width: 200, tilt: null, masks: [] })
    expect(defaultTransect(shape, { axis: 'y', young: 'high' }).points).toEqual([point(150, 1000), point(150, 0)])
  })

  it('follows a lying core, and is no wider than 200 pixels on a broad one', () => {
    const lying = { ...shape, width: 9000, height: 1501 }
    const transect = defaultTransect(lying, { axis: 'x', young: 'high' })
    expect(transect.points).toEqual([point(9000, 750.5), point(0, 750.5)])
    // Odd, as the breadth is: the strip begins and ends between pixels.
    expect(transect.width).toBe(199)
  })

  it('passes its own check on scans of any size', () => {
    for (const width of [1, 2, 3, 84, 261, 5000]) {
      for (const axis of ['x', 'y'] as const) {
        const scan = { ...shape, width, height: 777 }
        checkTransect(scan, defaultTransect(scan, { axis, young: 'low' }))
      }
    }
  })
})

describe('a path', () => {
  const bent = [point(100, 100), point(100, 400), point(200, 400 + 100 * Math.sqrt(3))]

  it('has the length of its segments, and a place at every distance; beyond its ends it stays there', () => {
    expect(pathLength(bent)).toBeCloseTo(500, 10)
    expect(pointAt(bent, 250)).toEqual(point(100, 350))
    expect(pointAt(bent, 400).x).toBeCloseTo(150, 10)
    expect(pointAt(bent, -5)).toEqual(point(100, 100))
    expect(pointAt(bent, 600).x).toBeCloseTo(200, 10)
  })

  it('points downcore, with its right-hand side to the right of an upright core', () => {
    expect(tangentAt(bent, 10)).toEqual({ along: { x: 0, y: 1 }, across: { x: 1, y: -0 } })
    expect(tangentAt(bent, 350).along.x).toBeCloseTo(0.5, 12)
    // Young end at the left: upright, the right-hand side is the upper one of the scan.
    expect(tangentAt([point(0, 50), point(90, 50)], 10).across).toEqual({ x: 0, y: -1 })
  })

  it('tells the downcore coordinate of a distance, and the distance of a coordinate', () => {
    const transect = along(...bent)
    const upright = { axis: 'y', young: 'low' } as const
    for (const distance of [0, 120, 300, 301, 499]) {
      const axis = axisPosition(transect, upright, shape, distance)
      expect(distanceAtAxis(transect, upright, shape, axis)).toBeCloseTo(distance, 9)
    }
    expect(axisPosition(transect, upright, shape, 100)).toBe(200)
    const flipped = along(...bent.toReversed())
    expect(axisPosition(flipped, { axis: 'y', young: 'high' }, shape, 0)).toBeCloseTo(600 - 100 * Math.sqrt(3), 9)
  })

  it('takes coordinates younger than its start to 0 and older than its end to its length', () => {
    const transect = along(...bent)
    expect(distanceAtAxis(transect, { axis: 'y', young: 'low' }, shape, 5)).toBe(0)
    expect(distanceAtAxis(transect, { axis: 'y', young: 'low' }, shape, 990)).toBeCloseTo(500, 9)
  })

  it('finds where it comes nearest to a point, and on which side the point lies', () => {
    expect(lengthAlong(bent, point(110, 250))).toEqual({ distance: 150, across: 10 })
    expect(lengthAlong(bent, point(60, 250)).across).toBe(-40)
    expect(lengthAlong(bent, point(100, 20)).distance).toBe(0)
  })
})

describe('checkTransect', () => {
  const refused = (transect: Transect) => {
    try {
      checkTransect(shape, transect)
    } catch (fault) {
      return (fault as Error).message
    }
    return 'accepted'
  }

  it('wants two points on the scan', () => {
    expect(refused(along(point(10, 10)))).toBe(
      'transect.points must have at least 2 points; there are 1: draw the path from the young end to the old',
    )
    expect(refused(along(point(150, 10), point(301, 500)))).toBe(
      'transect.points[1] must lie on the scan of 300 x 1000 pixels; it is at 301, 500',
    )
    expect(refused(along(point(150, NaN), point(150, 500)))).toBe(
      'transect.points[0].y must be a finite number; it is NaN',
    )
  })

  it('wants a length', () => {
    expect(refused(along(point(9, 9), point(9, 9)))).toBe(
      'transect.points must span at least one pixel; the path is 0 pixels long',
    )
    expect(refused(along(point(9, 9), point(9, 99), point(9, 99)))).toBe(
      'transect.points[2] must differ from the point before it; both are at 9, 99',
    )
  })

  it('wants a path that goes on', () => {
    expect(refused(along(point(150, 10), point(150, 500), point(150, 400)))).toBe(
      'the path must not turn back on itself; at transect.points[1] it turns by 90 degrees or more',
    )
    const loop = [point(100, 300), point(200, 300), point(250, 387), point(200, 473), point(100, 473), point(50, 387)]
    expect(refused(along(...loop))).toBe('accepted')
    expect(refused(along(...loop, point(120, 266)))).toBe('the path must not cross itself; segment 6 crosses segment 1')
  })

  it('wants a width of at least a pixel that fits the scan', () => {
    const path = along(point(150, 0), point(150, 1000))
    expect(refused({ ...path, width: scanPixels(0.5) })).toBe(
      'transect.width must be between 1 pixel and the breadth of the scan (300); it is 0.5',
    )
    expect(refused({ ...path, width: scanPixels(301) })).toContain('it is 301')
    expect(refused({ ...path, width: scanPixels(NaN) })).toBe('transect.width must be a finite number; it is NaN')
  })

  it('wants a tilt within 15 degrees and masks that are areas', () => {
    const path = along(point(150, 0), point(150, 1000))
    expect(refused({ ...path, tilt: 0.3 })).toBe(
      'transect.tilt must be between -15 and 15 degrees; it is 17.19: lay the path across the bedding instead',
    )
    expect(refused({ ...path, tilt: Infinity })).toContain('transect.tilt must be a finite number')
    expect(refused({ ...path, masks: [[point(1, 1), point(2, 2)]] })).toBe(
      'transect.masks[0] must have at least 3 corners; it has 2',
    )
    expect(refused({ ...path, tilt: 0.2, masks: [[point(1, 1), point(2, 2), point(-5, 2000)]] })).toBe('accepted')
  })
})

describe('the regions a profile is read from', () => {
  const long: ScanShape = { width: 2000, height: 90_000, channels: 1, bits: 8 }

  it('cover a straight path in its width and no more, in bands of at most four megapixels', () => {
    const transect = defaultTransect(long, { axis: 'y', young: 'low' })
    const cuts = Array.from({ length: 901 }, (_, k) => 100 * k)
    const bands = regionsOf(long, transect, { margin: 0, side: 0, cuts })
    expect(bands.length).toBe(5)
    for (const { from, to, region } of bands) {
      expect(region).toEqual({ x: 900, y: from, width: 200, height: to - from })
      expect(region.width * region.height).toBeLessThanOrEqual(4 << 20)
    }
    expect(bands.at(-1)!.to).toBe(90_000)
  })

  it('hold every sample of a bent path', () => {
    const transect = along(point(100, 100), point(200, 400), point(120, 800))
    const rows = Math.floor(pathLength(transect.points))
    const bands = regionsOf(shape, transect, { margin: 3, side: 1, cuts: [0, 200, 400, rows], pixels: 20_000 })
    expect(bands.length).toBe(3)
    for (const { from, to, region } of bands) {
      for (let row = from; row < to; row += 7) {
        const centre = pointAt(transect.points, row + 0.5)
        const { across } = tangentAt(transect.points, row + 0.5)
        for (const offset of [-10, 0, 10]) {
          const x = centre.x + offset * across.x
          const y = centre.y + offset * across.y
          expect(x >= region.x && x <= region.x + region.width).toBe(true)
          expect(y >= region.y && y <= region.y + region.height).toBe(true)
        }
      }
    }
  })
})
