import { describe, expect, it } from 'vitest'
import { typicalThickness } from '../../worker/core/typicalThickness.ts'
import { finish } from '../../worker/work.ts'
import { drawProfile, usualProfile, type ProfileRules } from '../fixtures/drawnProfile.ts'

/** How far the estimate is from the thickness drawn, as logarithms to base 2: median size, and the largest of any row. */
function errors(rules: Partial<ProfileRules>, seed: number, change = (intensity: Float64Array) => intensity) {
  const { intensity, thickness } = drawProfile({ ...usualProfile, ...rules }, seed)
  const found = finish(typicalThickness(change(intensity)))
  const sizes = found.map((value, row) => Math.abs(Math.log2(value / thickness[row]))).sort()
  return { median: sizes[sizes.length >> 1], worst: sizes[sizes.length - 1] }
}

describe('the typical thickness of drawn profiles', () => {
  const cases: [string, Partial<ProfileRules>][] = [
    ['of 5 px', { thicknessTop: 5, thicknessBase: 5, spread: 0.25 }],
    ['of 12 px', { thicknessTop: 12, thicknessBase: 12 }],
    ['of 40 px', { thicknessTop: 40, thicknessBase: 40 }],
    ['of 120 px', { thicknessTop: 120, thicknessBase: 120 }],
    ['thinning tenfold downcore', { thicknessTop: 60, thicknessBase: 6, years: 300 }],
    ['thickening tenfold downcore', { thicknessTop: 6, thicknessBase: 60, years: 300 }],
    ['even as a sine', { season: 'sine', spread: 0.2 }],
    ['very uneven', { spread: 0.4, memory: 0.5 }],
    ['under heavy noise', { noise: 0.4 }],
    ['on a strongly wandering trend', { wander: 2 }],
    ['with a second lamina in every year', { season: 'two laminae', thicknessTop: 26, thicknessBase: 26 }],
  ]
  for (const [name, rules] of cases) {
    it(`layers ${name}: within a sixth in the middle, nowhere off by a factor of two`, () => {
      for (let seed = 1; seed <= 4; seed++) {
        const { median, worst } = errors(rules, seed)
        expect(median, `seed ${seed}`).toBeLessThan(Math.log2(7 / 6))
        expect(worst, `seed ${seed}`).toBeLessThan(1)
      }
    })
  }

  it('does not mind gaps, an event bed, or a crack', () => {
    const disturbed = (intensity: Float64Array) => {
      intensity.fill(NaN, 300, 360).fill(NaN, 1000, 1004).fill(0, 1500, 1506)
      for (let row = 2000; row < 2120; row++) intensity[row] = 60 + row - 2000
      return intensity
    }
    for (let seed = 1; seed <= 4; seed++) {
      const { median, worst } = errors({}, seed, disturbed)
      expect(median, `seed ${seed}`).toBeLessThan(Math.log2(7 / 6))
      expect(worst, `seed ${seed}`).toBeLessThan(1)
    }
  })

  it('does not depend on contrast or sign of the intensity', () => {
    const { intensity } = drawProfile(usualProfile, 8)
    const found = finish(typicalThickness(intensity))
    const turned = finish(typicalThickness(intensity.map((value) => 30_000 - 12 * value)))
    found.forEach((value, row) => expect(turned[row] / value).toBeCloseTo(1, 6))
  })

  it('is a number at every row, even where there is nothing to go by', () => {
    for (const intensity of [
      new Float64Array(0),
      Float64Array.of(4),
      new Float64Array(25).fill(NaN),
      new Float64Array(500).fill(3),
      Float64Array.from({ length: 40 }, (_, i) => i),
    ]) {
      const found = finish(typicalThickness(intensity))
      expect(found.length).toBe(intensity.length)
      expect(found.every((value) => value >= 3 && value < 700)).toBe(true)
    }
  })
})
