import { describe, expect, it } from 'vitest'
import { detrendProfile, type DetrendRecipe } from '../../worker/core/detrend.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import { finish } from '../../worker/work.ts'
import { drawProfile, profileOf, usualProfile } from '../fixtures/drawnProfile.ts'

const recipe = defaultRecipe.detrend
const detrended = (intensity: Float64Array, changes: Partial<DetrendRecipe> = {}) =>
  finish(detrendProfile(profileOf(intensity), { ...recipe, ...changes }))

/** Layers of 20 rows on a slow swell four times as strong. */
const layers = Float64Array.from({ length: 4000 }, (_, i) => 10 * Math.sin((2 * Math.PI * i) / 20))
const swell = Float64Array.from({ length: 4000 }, (_, i) => 100 + 40 * Math.sin((2 * Math.PI * i) / 1500))
const both = layers.map((value, i) => value + swell[i])

describe('detrendProfile', () => {
  for (const method of ['moving-median', 'moving-mean', 'loess', 'high-pass'] as const) {
    it(`takes the slow change off and leaves the layers: ${method}`, () => {
      const { trend, signal, typicalThickness } = detrended(both, { method, smoothing: 'none', standardise: false })
      expect(Math.abs(typicalThickness[2000] - 20)).toBeLessThan(1)
      for (let i = 200; i < 3800; i++) {
        expect(Math.abs(trend[i] - swell[i])).toBeLessThan(2.5)
        expect(Math.abs(signal[i] - layers[i])).toBeLessThan(2.5)
      }
    })

    it(`leaves gaps open and is not smeared by them: ${method}`, () => {
      const gappy = both.slice().fill(NaN, 1000, 1030)
      const { trend, signal, spread } = detrended(gappy, { method })
      for (const column of [trend, signal, spread]) {
        for (let i = 900; i < 1100; i++) expect(Number.isNaN(column[i])).toBe(i >= 1000 && i < 1030)
      }
    })
  }

  it('takes nothing but the level off where no trend is wanted', () => {
    const { trend, signal } = detrended(both, { method: 'none', smoothing: 'none', standardise: false })
    expect(new Set(trend).size).toBe(1)
    signal.forEach((value, i) => expect(value + trend[i]).toBeCloseTo(both[i], 9))
  })

  it('brings faint and strong stretches to one scale, and says what it divided by', () => {
    const fading = both.map((value, i) => swell[i] + (value - swell[i]) * (i < 2000 ? 1 : 0.2))
    const { signal, spread, standardised } = detrended(fading)
    const size = (from: number) => signal.subarray(from, from + 1000).reduce((sum, value) => sum + Math.abs(value), 0)
    expect(size(2500) / size(500)).toBeCloseTo(1, 1)
    expect(spread[3000] / spread[1000]).toBeCloseTo(0.2, 1)
    expect(standardised).toBe(true)
  })

  it('does not blow a blank stretch up to look like layers', () => {
    const blank = both.slice().fill(100, 1500, 2500)
    for (let i = 1500; i < 2500; i++) blank[i] += 0.02 * Math.sin(i)
    const { signal } = detrended(blank)
    for (let i = 1800; i < 2200; i++) expect(Math.abs(signal[i])).toBeLessThan(0.1)
  })

  it('smooths by the length in the recipe, or by a share of the layers', () => {
    const rough = both.map((value, i) => value + (i % 2 === 0 ? 5 : -5))
    const roughness = (changes: Partial<DetrendRecipe>) => {
      const { signal } = detrended(rough, { ...changes, standardise: false })
      let sum = 0
      for (let i = 101; i < 3900; i++) sum += Math.abs(signal[i - 1] - 2 * signal[i] + signal[i + 1])
      return sum
    }
    expect(roughness({})).toBeLessThan(0.35 * roughness({ smoothing: 'none' }))
    expect(roughness({ smoothingLength: 6 })).toBeLessThan(0.8 * roughness({}))
    expect(roughness({ smoothing: 'savitzky-golay' })).toBeLessThan(0.7 * roughness({ smoothing: 'none' }))
  })

  it('takes a window of its own from the recipe', () => {
    const { trend } = detrended(both, { method: 'moving-mean', window: 1001, smoothing: 'none' })
    // Far too wide a window flattens the swell.
    expect(Math.abs(trend[375] - swell[375])).toBeGreaterThan(10)
  })

  it('holds up with one row, with none readable, and with no contrast', () => {
    expect(detrended(Float64Array.of(7)).signal).toEqual(Float64Array.of(0))
    expect(detrended(new Float64Array(60).fill(NaN)).signal.every((value) => Number.isNaN(value))).toBe(true)
    expect(detrended(new Float64Array(300).fill(42)).signal.every((value) => value === 0)).toBe(true)
  })

  it('names what is wrong with a recipe', () => {
    expect(() => detrended(both, { method: 'fit' as 'none' })).toThrow(
      'recipe.detrend.method must be one of moving-median, moving-mean, loess, high-pass, none; it is "fit"',
    )
    expect(() => detrended(both, { window: 2 })).toThrow(
      'recipe.detrend.window must be between 3 and 10000000 path pixels, or null to take it from the profile; it is 2',
    )
    expect(() => detrended(both, { smoothingLength: NaN })).toThrow(
      'recipe.detrend.smoothingLength must be between 0.5',
    )
    expect(() => detrended(both, { standardise: 'yes' as unknown as boolean })).toThrow(
      'recipe.detrend.standardise must be true or false; it is "yes"',
    )
  })

  it('reports its progress in stages', () => {
    const { intensity } = drawProfile({ ...usualProfile, years: 30 }, 1)
    const stages = new Set([...detrendProfile(profileOf(intensity), recipe)].map(({ stage }) => stage))
    expect([...stages]).toEqual(['thickness', 'trend'])
  })
})
