import { describe, expect, it } from 'vitest'
import { hitBoundary, hitSpan, hitTransectHandle } from '../../../src/view/hitTest.ts'
import { acrossToScreen, wholeAcross } from '../../../src/view/tiles.ts'
import { bandEdges, pathAcrossAt } from '../../../src/view/transectShape.ts'
import { fit, show, toScreen } from '../../../src/view/viewport.ts'

const view = show(fit(10_000, 600), 4000, 5000)
const position = Float64Array.of(100, 4200, 4210, 4600, 9000)

describe('grasping a boundary', () => {
  it('takes the nearest within reach', () => {
    expect(hitBoundary(view, position, toScreen(view, 4212))).toBe(2)
    expect(hitBoundary(view, position, toScreen(view, 4203))).toBe(1)
    expect(hitBoundary(view, position, toScreen(view, 4600) - 5.9, 6)).toBe(3)
  })
  it('takes none beyond reach, and none where there is none', () => {
    expect(hitBoundary(view, position, toScreen(view, 4600) - 6.1, 6)).toBe(-1)
    expect(hitBoundary(view, new Float64Array(0), 10)).toBe(-1)
  })
})

describe('grasping a span', () => {
  const spans = [
    { from: 4100, to: 4900, kind: 'unreadable' as const },
    { from: 4300, to: 4500, kind: 'event' as const },
  ]
  it('takes an end before a body', () => {
    expect(hitSpan(view, spans, toScreen(view, 4300) + 3)).toEqual({ index: 1, part: 'from' })
    expect(hitSpan(view, spans, toScreen(view, 4900) - 2)).toEqual({ index: 0, part: 'to' })
  })
  it('takes the shorter of two bodies', () => {
    expect(hitSpan(view, spans, toScreen(view, 4400))).toEqual({ index: 1, part: 'body' })
    expect(hitSpan(view, spans, toScreen(view, 4700))).toEqual({ index: 0, part: 'body' })
  })
  it('takes nothing outside', () => {
    expect(hitSpan(view, spans, toScreen(view, 4950))).toBe(null)
  })
})

describe('grasping a transect', () => {
  const across = wholeAcross(1000, 300)
  const transect = {
    points: [
      { axis: 0, across: 500 },
      { axis: 4500, across: 500 },
      { axis: 10_000, across: 500 },
    ],
    width: 400,
  }
  const x = (position: number) => acrossToScreen(across, 300, position)
  const hit = (px: number, py: number) => hitTransectHandle(view, across, 300, transect, px, py)

  it('takes a point before the edge and the path', () => {
    expect(hit(x(500) + 5, toScreen(view, 4500) + 5)).toEqual({ kind: 'point', index: 1 })
  })
  it('takes an edge anywhere along it', () => {
    expect(hit(x(300) + 3, toScreen(view, 4200))).toEqual({ kind: 'edge', side: 'left', index: 0 })
    expect(hit(x(700) - 3, toScreen(view, 4800))).toEqual({ kind: 'edge', side: 'right', index: 1 })
  })
  it('takes the path between its points', () => {
    expect(hit(x(500) - 4, toScreen(view, 4800))).toEqual({ kind: 'segment', index: 1 })
  })
  it('takes nothing beside it', () => {
    expect(hit(x(600), toScreen(view, 4200))).toBe(null)
  })
  it('of a band too thin to choose, takes the nearer edge', () => {
    const thin = { ...transect, width: 6 }
    expect(hitTransectHandle(view, across, 300, thin, x(502), toScreen(view, 4200))).toEqual({
      kind: 'edge',
      side: 'right',
      index: 0,
    })
  })
})

describe('the band of a transect', () => {
  it('runs at half the width on both sides, also where it bends', () => {
    const edges = bandEdges({
      points: [
        { axis: 0, across: 0 },
        { axis: 100, across: 0 },
        { axis: 200, across: 100 },
      ],
      width: 20,
    })
    expect(edges.left[0]).toEqual({ axis: 0, across: -10 })
    expect(edges.right[0]).toEqual({ axis: 0, across: 10 })
    // At a bend the edge point is as far from the lines of both parts.
    const { axis, across } = edges.right[1]
    expect(across).toBeCloseTo(10, 9)
    expect(Math.abs(across - (axis - 100)) / Math.SQRT2).toBeCloseTo(10, 9)
    expect(edges.left[2].axis).toBeCloseTo(200 + 10 / Math.SQRT2, 9)
  })
  it('does not run off at a hairpin', () => {
    const { left } = bandEdges({
      points: [
        { axis: 0, across: 0 },
        { axis: 100, across: 0 },
        { axis: 0.001, across: 0.5 },
      ],
      width: 20,
    })
    expect(Math.hypot(left[1].axis - 100, left[1].across)).toBeLessThanOrEqual(30 + 1e-9)
  })
  it('is found at any depth, and held straight beyond its ends', () => {
    const transect = {
      points: [
        { axis: 100, across: 10 },
        { axis: 200, across: 30 },
      ],
      width: 5,
    }
    expect([0, 100, 150, 200, 900].map((axis) => pathAcrossAt(transect, axis))).toEqual([10, 10, 20, 30, 30])
  })
})
