import { describe, expect, it } from 'vitest'
import { decimalsFor, formatNumber, formatYearCE } from '../../../src/view/numbers.ts'
import { depthText, depthTicks, paintDepthAxis } from '../../../src/view/strip/depthAxis.ts'
import { lightTheme } from '../../../src/view/theme.ts'
import { minorStep, multiples, niceStep, placeLabels, roundness } from '../../../src/view/ticks.ts'
import { fit, pan, zoomAt } from '../../../src/view/viewport.ts'
import { overlaps, RecordingSurface } from './recordingSurface.ts'

describe('numbers for people', () => {
  it('carry a real minus sign and none at a rounded zero', () => {
    expect(formatNumber(-3.25, 1)).toBe('−3.3')
    expect(formatNumber(-0.04, 1)).toBe('0.0')
  })
  it('set thousands apart from five figures on', () => {
    expect(formatNumber(2019)).toBe('2019')
    expect(formatNumber(12_000)).toBe('12\u202f000')
    expect(formatNumber(-1_234_567.5, 1)).toBe('−1\u202f234\u202f567.5')
  })
  it('say what is not a number', () => {
    expect(formatNumber(NaN)).toBe('–')
    expect(formatNumber(-Infinity)).toBe('−∞')
  })
  it('know no year zero', () => {
    expect([1, 0, -99].map((year) => formatYearCE(year))).toEqual(['1', '1 BCE', '100 BCE'])
    expect(formatYearCE(1723, true)).toBe('1723 CE')
  })
  it('take as many decimals as the step needs', () => {
    expect([5, 0.5, 0.25, 0.1 + 0.2, 1e-3].map(decimalsFor)).toEqual([0, 1, 2, 1, 3])
  })
})

describe('round steps', () => {
  it('are 1, 2 or 5 times a power of ten and not smaller than asked', () => {
    expect([0.9, 1, 1.01, 2.1, 5.5, 99, 0.03].map(niceStep)).toEqual([1, 1, 2, 5, 10, 100, 0.05])
  })
  it('fall back on 1 for what is no step', () => {
    expect([0, -1, NaN, Infinity].map(niceStep)).toEqual([1, 1, 1, 1])
  })
  it('are divided into parts that people read', () => {
    expect(minorStep(10, 1)).toBe(1)
    expect(minorStep(20, 4)).toBe(5)
    expect(minorStep(50, 4)).toBe(10)
    expect(minorStep(10, 6)).toBe(null)
  })
  it('have multiples without drift', () => {
    expect(multiples(0.1, 0.25, 0.61).map((value) => value.toFixed(3))).toEqual(['0.300', '0.400', '0.500', '0.600'])
  })
})

describe('the placing of labels', () => {
  it('grants the heavier of two that meet, and of equals the first', () => {
    const wish = (at: number, weight: number) => ({ at, room: 10, weight })
    expect(placeLabels([wish(0, 0), wish(5, 1), wish(20, 0)])).toEqual([1, 2])
    expect(placeLabels([wish(0, 0), wish(5, 0), wish(10, 0)])).toEqual([0, 2])
  })
  it('never lets two granted labels touch', () => {
    const wishes = Array.from({ length: 300 }, (_, i) => ({ at: (i * 7919) % 1000, room: 4 + (i % 30), weight: i % 5 }))
    const granted = placeLabels(wishes).map((k) => wishes[k])
    for (let i = 1; i < granted.length; i++) {
      expect(granted[i].at - granted[i - 1].at).toBeGreaterThanOrEqual(
        (granted[i].room + granted[i - 1].room) / 2 - 1e-6,
      )
    }
    expect(granted.length).toBeGreaterThan(20)
  })
  it('holds round numbers for heavier', () => {
    expect([0, 2000, 300, 70, 8, 7].map(roundness)).toEqual(
      [...[0, 2000, 300, 70, 8, 7].map(roundness)].sort((a, b) => b - a),
    )
  })
})

describe('the depth axis', () => {
  it('never lets labels overlap, at any zoom, with and without a scale', () => {
    for (const mmPerPx of [0.05, 0.0127, 1.7, null]) {
      let view = fit(30_000, 700)
      for (let step = 0; step < 60; step++) {
        view = zoomAt(view, 311, 1.13)
        const surface = new RecordingSurface()
        paintDepthAxis(
          surface,
          { x: 0, y: 0, width: 60, height: 700 },
          { viewport: view, mmPerPx, depthTop: 812.5 },
          lightTheme,
        )
        expect(overlaps(surface.texts)).toEqual([])
        expect(surface.texts.length).toBeGreaterThanOrEqual(5)
        expect(surface.texts.every(({ x }) => x >= 0)).toBe(true)
      }
    }
  })

  it('labels each mark with the depth that lies there', () => {
    const view = pan(zoomAt(fit(10_000, 600), 0, 20), 377)
    const { major, unit, step } = depthTicks({ viewport: view, mmPerPx: 0.05, depthTop: 100 })
    expect(unit).toBe('mm')
    for (const { at, value, text } of major) {
      const mm = 100 + (at / view.scale + view.top) * 0.05
      expect(mm).toBeCloseTo(value, 6)
      expect(Number(text)).toBeCloseTo(mm, 6)
      expect(Math.abs(value / step - Math.round(value / step))).toBeLessThan(1e-6)
    }
  })

  it('counts centimetres from afar, millimetres close up, pixels without a scale', () => {
    const whole = fit(10_000, 600)
    expect(depthTicks({ viewport: whole, mmPerPx: 0.05, depthTop: 0 }).unit).toBe('cm')
    expect(depthTicks({ viewport: zoomAt(whole, 0, 50), mmPerPx: 0.05, depthTop: 0 }).unit).toBe('mm')
    expect(depthTicks({ viewport: whole, mmPerPx: null, depthTop: 0 }).unit).toBe('px')
  })

  it('marks nothing above and below the core', () => {
    const view = fit(1000, 500)
    const { major, minor } = depthTicks({ viewport: view, mmPerPx: 0.1, depthTop: 50 })
    for (const at of [...major.map((tick) => tick.at), ...minor]) {
      expect(at).toBeGreaterThanOrEqual(14 - 1e-6)
      expect(at).toBeLessThanOrEqual(486 + 1e-6)
    }
  })

  it('reads the depth under the pointer more finely than its marks', () => {
    const view = zoomAt(fit(10_000, 600), 0, 20)
    expect(depthText({ viewport: view, mmPerPx: 0.05, depthTop: 100 }, 123)).toBe('106.15')
    expect(depthText({ viewport: view, mmPerPx: null, depthTop: 100 }, 123.4)).toBe('123')
  })
})
