import { describe, expect, it } from 'vitest'
import { clamp, fit, pan, scaleLimits, toAxis, toScreen, zoomAt } from '../../src/view/viewport.ts'
import { seededRandom } from '../../worker/random.ts'

const seed = 20_251

describe(`any view of any core (seed ${seed})`, () => {
  const random = seededRandom(seed)
  const between = (least: number, most: number) => least + (most - least) * random.uniform()
  const views = Array.from({ length: 400 }, () => {
    const whole = fit(Math.exp(between(3, 12)), between(200, 2000))
    return zoomAt(whole, between(0, whole.height), Math.exp(between(0, 6)))
  })

  it('turns an axis position into a place on screen and back', () => {
    for (const view of views) {
      const axis = between(-100, view.length + 100)
      expect(toAxis(view, toScreen(view, axis))).toBeCloseTo(axis, 6)
    }
  })

  it('keeps what lies under the pointer there while zooming, unless the end of the core comes into view', () => {
    let held = 0
    for (const view of views) {
      const y = between(0, view.height)
      const factor = Math.exp(between(-1, 1))
      const zoomed = zoomAt(view, y, factor)
      const [least, most] = scaleLimits(view)
      const scale = Math.min(most, Math.max(least, view.scale * factor))
      const free = { ...view, scale, top: toAxis(view, y) - y / scale }
      if (clamp(free) !== free) continue
      held += 1
      expect(toScreen(zoomed, toAxis(view, y))).toBeCloseTo(y, 6)
    }
    expect(held).toBeGreaterThan(100)
  })

  it('stays within its limits however it is moved, and clamping twice changes nothing', () => {
    for (const start of views) {
      let view = start
      for (let step = 0; step < 8; step++) {
        view =
          random.uniform() < 0.5
            ? pan(view, between(-3000, 3000))
            : zoomAt(view, between(0, 500), Math.exp(between(-2, 2)))
        const [least, most] = scaleLimits(view)
        expect(view.scale).toBeGreaterThanOrEqual(least)
        expect(view.scale).toBeLessThanOrEqual(most)
        expect(clamp(view)).toEqual(view)
        // Some of the core is always on screen.
        expect(toScreen(view, view.length)).toBeGreaterThan(0)
        expect(toScreen(view, 0)).toBeLessThan(view.height)
      }
    }
  })
})
