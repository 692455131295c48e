import { describe, expect, it } from 'vitest'
import { findCandidates, markingLamina, type CandidateRecipe, type Candidates } from '../../worker/core/candidates.ts'
import { detrendProfile } from '../../worker/core/detrend.ts'
import type { Profile } from '../../worker/core/profile.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import { finish } from '../../worker/work.ts'
import { drawProfile, profileOf, usualProfile } from '../fixtures/drawnProfile.ts'

function candidatesOf(profile: Profile, changes: Partial<CandidateRecipe> = {}): Candidates {
  const detrended = finish(detrendProfile(profile, defaultRecipe.detrend))
  return finish(findCandidates(detrended, profile, { ...defaultRecipe.candidates, ...changes }))
}

/** Distance from each position to the nearest candidate. */
function distances(positions: number[], { position }: Candidates): number[] {
  return positions.map((at) => position.reduce((least, found) => Math.min(least, Math.abs(found - at)), Infinity))
}

const middle = (values: number[]) => values.toSorted((a, b) => a - b)[values.length >> 1]

describe('candidates of a drawn clastic profile', () => {
  const { intensity, boundaries } = drawProfile(usualProfile, 5)
  const profile = profileOf(intensity, 6)
  const years = boundaries.slice(1, -1)
  const found = candidatesOf(profile)

  it('hold a candidate at the top of the winter layer of every year, to a fraction of a pixel', () => {
    const away = distances(years, found)
    expect(middle(away)).toBeLessThan(0.35)
    expect(away.filter((distance) => distance > 2).length / years.length).toBeLessThan(0.02)
  })

  it('are sorted, with a peak below each boundary, in columns of one length', () => {
    expect(found.lamina).toBe('dark')
    for (let i = 1; i < found.position.length; i++) expect(found.position[i]).toBeGreaterThan(found.position[i - 1])
    for (const [i, position] of found.position.entries()) expect(found.peak[i]).toBeGreaterThanOrEqual(position - 0.5)
    for (const column of Object.values(found)) {
      if (column instanceof Float64Array) expect(column.length).toBe(found.position.length)
    }
  })

  it('speak for themselves: those of years stand out by prominence, edge and continuity from those between', () => {
    const real = Array.from(found.position, (at) => years.some((year) => Math.abs(year - at) < 1.5))
    const mean = (column: Float64Array, which: boolean) => {
      const chosen = [...column].filter((_, i) => real[i] === which)
      return chosen.reduce((sum, value) => sum + value, 0) / chosen.length
    }
    expect(real.filter((is) => !is).length).toBeGreaterThan(10)
    expect(mean(found.prominence, true)).toBeGreaterThan(3 * mean(found.prominence, false))
    expect(mean(found.edgeStrength, true)).toBeGreaterThan(2 * mean(found.edgeStrength, false))
    expect(mean(found.continuity, true)).toBeGreaterThan(0.97)
    expect(mean(found.continuity, false)).toBeLessThan(0.9)
  })

  it('lie at the edge that the rule names: young edge, summit, old edge, in this order', () => {
    const top = candidatesOf(profile, { prominence: 1 })
    const centre = candidatesOf(profile, { prominence: 1, edge: 'middle', lamina: 'dark' })
    const base = candidatesOf(profile, { prominence: 1, edge: 'base', lamina: 'dark' })
    expect(centre.position).toEqual(centre.peak)
    expect(base.peak).toEqual(top.peak)
    for (let i = 0; i < top.position.length; i++) {
      expect(top.position[i]).toBeLessThan(centre.position[i])
      expect(base.position[i]).toBeGreaterThan(centre.position[i])
    }
  })

  it('are the same for the same profile turned to its negative, with the lamina light', () => {
    const negative = profileOf(
      intensity.map((value) => 255 - value),
      6,
    )
    const turned = candidatesOf(negative, { prominence: 0.5 })
    const as = candidatesOf(profile, { prominence: 0.5 })
    expect(turned.lamina).toBe('light')
    expect(turned.position.length).toBe(as.position.length)
    turned.position.forEach((at, i) => expect(at).toBeCloseTo(as.position[i], 6))
  })

  it('keep the distance asked for, and the prominence', () => {
    const sparse = candidatesOf(profile, { distance: 30 })
    for (let i = 1; i < sparse.peak.length; i++) expect(sparse.peak[i] - sparse.peak[i - 1]).toBeGreaterThan(28.9)
    for (const prominence of candidatesOf(profile, { prominence: 1.5 }).prominence)
      expect(prominence).toBeGreaterThanOrEqual(1.5)
  })

  it('have the same prominence whether the recipe standardises or not', () => {
    const raw = finish(detrendProfile(profile, { ...defaultRecipe.detrend, standardise: false }))
    const asked = { ...defaultRecipe.candidates, prominence: 1 }
    const unscaled = finish(findCandidates(raw, profile, asked))
    const scaled = candidatesOf(profile, { prominence: 1 })
    expect(unscaled.prominence.length).toBe(scaled.prominence.length)
    unscaled.prominence.forEach((value, i) => expect(value).toBeCloseTo(scaled.prominence[i], 9))
  })
})

describe('continuity', () => {
  it('is the share of lanes that show the peak', () => {
    const { intensity, boundaries } = drawProfile({ ...usualProfile, years: 60, noise: 0.03 }, 2)
    const profile = profileOf(intensity)
    // In one lane of three the middle of the core has no layers.
    for (let row = 500; row < 700; row++) profile.lanes[row * 3 + 1] = 120
    const found = candidatesOf(profile, { prominence: 1 })
    for (const [i, at] of found.peak.entries()) {
      const inside = at > 505 && at < 695
      if (inside || at < 490 || at > 710) expect(found.continuity[i]).toBeCloseTo(inside ? 2 / 3 : 1, 9)
    }
    expect(boundaries.length).toBe(60)
  })
})

describe('markingLamina', () => {
  const saw = (jump: number) => Float64Array.from({ length: 400 }, (_, i) => jump * ((i % 20) / 10 - 1))

  it('is the lamina whose edge named by the rule is the sharp one', () => {
    // Downcore a slow rise and a jump to dark: a dark lamina with a sharp young edge, a light one with a sharp old edge.
    expect(markingLamina(saw(1), 'top')).toBe('dark')
    expect(markingLamina(saw(1), 'base')).toBe('light')
    expect(markingLamina(saw(-1), 'top')).toBe('light')
    expect(markingLamina(saw(-1), 'base')).toBe('dark')
  })

  it('is the thinner one where the rule names the middle', () => {
    const thinLight = Float64Array.from({ length: 400 }, (_, i) => (i % 20 < 3 ? 2 : -0.35))
    expect(markingLamina(thinLight, 'middle')).toBe('light')
    expect(
      markingLamina(
        thinLight.map((value) => -value),
        'middle',
      ),
    ).toBe('dark')
  })

  it('is dark without a clear answer', () => {
    const even = Float64Array.from({ length: 400 }, (_, i) => Math.sin(i / 3))
    for (const edge of ['top', 'middle', 'base'] as const) expect(markingLamina(even, edge)).toBe('dark')
    expect(markingLamina(new Float64Array(9), 'top')).toBe('dark')
    expect(markingLamina(new Float64Array(9).fill(NaN), 'top')).toBe('dark')
  })
})

describe('findCandidates', () => {
  it('finds nothing in a profile without readable rows or without contrast', () => {
    for (const level of [NaN, 100])
      expect(candidatesOf(profileOf(new Float64Array(200).fill(level))).position.length).toBe(0)
  })

  it('never places a boundary in a gap', () => {
    const { intensity } = drawProfile({ ...usualProfile, years: 80 }, 3)
    intensity.fill(NaN, 600, 640).fill(NaN, 900, 902)
    const { position } = candidatesOf(profileOf(intensity))
    for (const at of position) {
      expect(at > 600 && at < 640).toBe(false)
      expect(at > 900 && at < 902).toBe(false)
    }
  })

  it('names what is wrong with a recipe', () => {
    const profile = profileOf(new Float64Array(50))
    expect(() => candidatesOf(profile, { prominence: -1 })).toThrow(
      'recipe.candidates.prominence must be between 0 and 1000; it is -1',
    )
    expect(() => candidatesOf(profile, { edge: 'left' as 'top' })).toThrow(
      'recipe.candidates.edge must be one of top, middle, base; it is "left"',
    )
    expect(() => candidatesOf(profile, { distance: NaN })).toThrow(
      'recipe.candidates.distance must be between 0 and 10000000 path pixels, or null to take it from the profile; it is NaN',
    )
  })
})
