import { describe, expect, it } from 'vitest'
import {
  air,
  between,
  centre,
  closest,
  fit,
  pan,
  resize,
  reveal,
  revealLayer,
  scaleLimits,
  show,
  toAxis,
  toScreen,
  visibleRange,
  zoomAt,
} from '../../../src/view/viewport.ts'

const whole = fit(30_000, 800)
const middle = show(whole, 14_000, 16_000)

describe('the viewport', () => {
  it('fits the whole core between equal strips of air', () => {
    expect(toScreen(whole, 0)).toBeCloseTo(air, 9)
    expect(toScreen(whole, 30_000)).toBeCloseTo(800 - air, 9)
  })

  it('cannot be scrolled or zoomed out beyond the whole core', () => {
    expect(pan(whole, 500)).toEqual(whole)
    expect(zoomAt(whole, 200, 0.5)).toEqual(whole)
  })

  it('shows a stretch with air at both ends', () => {
    expect(toScreen(middle, 14_000)).toBeCloseTo(air, 6)
    expect(toScreen(middle, 16_000)).toBeCloseTo(800 - air, 6)
  })

  it('stops at single pixels', () => {
    const near = zoomAt(middle, 300, 1e9)
    expect(near.scale).toBe(closest)
    expect(scaleLimits(near)).toEqual([whole.scale, closest])
  })

  it('shows a core smaller than the window whole, even though its pixels are then larger than the usual limit', () => {
    const tiny = fit(30, 800)
    expect(tiny.scale).toBeGreaterThan(closest)
    expect(zoomAt(tiny, 10, 2)).toEqual(tiny)
  })

  it('stops scrolling where the core ends, with air beyond its end', () => {
    const below = pan(middle, 1e9)
    expect(toScreen(below, 30_000)).toBeCloseTo(800 - air, 6)
    const above = pan(middle, -1e9)
    expect(toScreen(above, 0)).toBeCloseTo(air, 6)
  })

  it('keeps the whole core whole when the window changes its height, and a close view at its scale', () => {
    expect(resize(whole, 500)).toEqual(fit(30_000, 500))
    expect(resize(middle, 500)).toEqual({ ...middle, height: 500 })
  })

  it('does not move for a position that has context on both sides', () => {
    expect(reveal(middle, toAxis(middle, 400))).toBe(middle)
  })

  it('scrolls just far enough that context is left on the far side, downcore and upcore', () => {
    const down = reveal(middle, toAxis(middle, 700), 0.3)
    expect(toScreen(down, toAxis(middle, 700))).toBeCloseTo(800 * 0.7, 6)
    const up = reveal(middle, toAxis(middle, 10), 0.3)
    expect(toScreen(up, toAxis(middle, 10))).toBeCloseTo(800 * 0.3, 6)
  })

  it('magnifies until a layer can be judged, and leaves a closer look alone', () => {
    const near = revealLayer(whole, 12_000, 20, 9)
    expect(near.scale * 20).toBeGreaterThanOrEqual(9)
    expect(toScreen(near, 12_000)).toBeCloseTo(400, 6)
    const nearer = revealLayer({ ...near, scale: 5, top: 11_950 }, 12_000, 20, 9)
    expect(nearer.scale).toBe(5)
    expect(revealLayer(middle, 15_000, NaN)).toBe(middle)
  })

  it('centres a position', () => {
    expect(toScreen(centre(middle, 9_000), 9_000)).toBeCloseTo(400, 6)
  })

  it('passes from one view to another through views between, from exactly the first to exactly the second', () => {
    const target = centre(zoomAt(middle, 100, 5), 15_500)
    expect(between(middle, target, 0).top).toBeCloseTo(middle.top, 6)
    expect(between(middle, target, 1)).toBe(target)
    const half = between(middle, target, 0.5)
    expect(half.scale).toBeCloseTo(Math.sqrt(middle.scale * target.scale), 9)
    expect(between(middle, pan(middle, 100), 0.5).top).toBeCloseTo(pan(middle, 50).top, 6)
  })

  it('survives a window without height, as there is before the page is laid out', () => {
    const flat = fit(1000, 0)
    expect(Number.isFinite(flat.scale) && Number.isFinite(flat.top)).toBe(true)
    expect(visibleRange(flat).every(Number.isFinite)).toBe(true)
  })
})
