import { describe, expect, it } from 'vitest'
import { buildPyramid, rangeOf } from '../../../src/view/minMaxPyramid.ts'
import { axisToPath, columnToAxis, pathAxis, pathToAxis } from '../../../src/view/pathAxis.ts'
import { paintProfile } from '../../../src/view/strip/profile.ts'
import { lightTheme } from '../../../src/view/theme.ts'
import { fit, show, toScreen } from '../../../src/view/viewport.ts'
import type { Viewport } from '../../../src/view/viewport.ts'
import { seededRandom } from '../../../worker/random.ts'
import { RecordingSurface } from './recordingSurface.ts'

describe('the pyramid of least and greatest values', () => {
  it('gives the extremes of any stretch, gaps left out, as a search through all values does', () => {
    const random = seededRandom(7)
    for (const length of [1, 2, 3, 63, 64, 65, 1000]) {
      const values = Float64Array.from({ length }, () => (random.uniform() < 0.2 ? NaN : Math.fround(random.normal())))
      const pyramid = buildPyramid(values)
      for (let trial = 0; trial < 50; trial++) {
        const from = random.below(length + 1)
        const to = from + random.below(length + 2 - from)
        const seen = values.slice(from, to).filter((value) => !Number.isNaN(value))
        const expected = seen.length > 0 ? [Math.min(...seen), Math.max(...seen)] : [NaN, NaN]
        expect(rangeOf(pyramid, from, to, [0, 0])).toEqual(expected)
      }
    }
  })

  it('is empty outside of the profile', () => {
    const pyramid = buildPyramid(Float64Array.of(1, 2, 3))
    expect(rangeOf(pyramid, -5, 0, [0, 0])).toEqual([NaN, NaN])
    expect(rangeOf(pyramid, -5, 100, [0, 0])).toEqual([1, 3])
    expect(rangeOf(buildPyramid(new Float64Array(0)), 0, 10, [0, 0])).toEqual([NaN, NaN])
  })
})

describe('the way from path to axis', () => {
  const bent = pathAxis([
    { axis: 100, across: 0 },
    { axis: 400, across: 400 },
    { axis: 1400, across: 400 },
  ])

  it('follows each part of a bent transect', () => {
    expect([0, 250, 500, 1000, 1500].map((path) => pathToAxis(bent, path))).toEqual([100, 250, 400, 900, 1400])
  })
  it('goes back again', () => {
    for (const path of [-20, 0, 33, 499, 501, 1500, 1800]) {
      expect(axisToPath(bent, pathToAxis(bent, path))).toBeCloseTo(path, 9)
    }
  })
  it('skips a point that leads no farther downcore', () => {
    const back = pathAxis([
      { axis: 0, across: 0 },
      { axis: 0, across: 30 },
      { axis: 100, across: 30 },
    ])
    expect(Array.from(back.axis)).toEqual([0, 100])
    expect(Array.from(back.path)).toEqual([0, 130])
  })
  it('turns whole columns, and takes a single point for straight down', () => {
    expect(Array.from(columnToAxis(pathAxis([{ axis: 5, across: 1 }]), [0, 10]))).toEqual([5, 15])
  })
})

describe('the profile column', () => {
  const length = 40_000
  const values = new Float64Array(length).fill(100)
  // One thin dark layer, a fiftieth of a screen row wide, and one unreadable stretch.
  values[23_456] = 3
  values.fill(NaN, 30_000, 31_000)
  const line = { pyramid: buildPyramid(values), domain: [0, 200] as const, tone: 'ink' as const }
  const path = pathAxis([
    { axis: 0, across: 50 },
    { axis: length, across: 50 },
  ])
  const surfaceOf = (viewport = fit(length, 600), pixelRatio = 1) => {
    const surface = new RecordingSurface(pixelRatio)
    const data = { viewport, path, lines: [line], spans: [], boundaries: null, cursor: null }
    paintProfile(surface, { x: 10, y: 0, width: 102, height: 600 }, data, lightTheme)
    return surface
  }
  const draw = (viewport: Viewport) => surfaceOf(viewport).polylines[0].points

  it('keeps a layer thinner than a screen row, as a bar that reaches to it', () => {
    const surface = surfaceOf()
    const ends = surface.segments.flatMap((one) => one.ends)
    const reach = Math.min(...ends.filter((_, i) => i % 4 === 0))
    expect(reach).toBeCloseTo(11 + 3 * 0.5, 6)
    const rows = ends.filter((_, i) => i % 4 === 1 && ends[i - 1] === reach)
    expect(rows.length).toBe(1)
    expect(Math.abs(rows[0] - toScreen(fit(length, 600), 23_456.5))).toBeLessThanOrEqual(1)
  })

  it('draws one bar in each device row from afar, however long the profile, and none where it is unreadable', () => {
    const bars = (ratio: number) => surfaceOf(fit(length, 600), ratio).segments.flatMap((one) => one.ends).length / 4
    const share = (572 * 39) / 40
    expect(Math.abs(bars(1) - share)).toBeLessThanOrEqual(2)
    expect(Math.abs(bars(2) - 2 * share)).toBeLessThanOrEqual(2)
  })

  it('draws two vertices in each device row from a middle distance', () => {
    expect(draw(show(fit(length, 600), 20_000, 21_500)).length).toBe(600 * 4)
  })

  it('lifts the pen where the profile is unreadable', () => {
    const points = draw(show(fit(length, 600), 29_900, 31_100))
    const gap = points.filter((value, i) => i % 2 === 0 && Number.isNaN(value)).length
    expect(gap).toBeGreaterThan(800)
    expect(points.some((value, i) => i % 2 === 0 && !Number.isNaN(value))).toBe(true)
  })

  it('close up, puts a vertex at the middle of each sample', () => {
    const view = show(fit(length, 600), 23_440, 23_470)
    const points = draw(view)
    const xs = points.filter((_, i) => i % 2 === 0)
    expect(points[2 * xs.indexOf(11 + 3 * 0.5) + 1]).toBeCloseTo(toScreen(view, 23_456.5), 6)
  })
})
