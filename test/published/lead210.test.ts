import { describe, expect, it } from 'vitest'
import { caesiumHorizon, caesiumLeft } from '../../worker/core/caesium.ts'
import {
  cfcsRate,
  cicAge,
  crsAge,
  crsRate,
  decayConstant,
  lead210Ages,
  lead210HalfLife,
} from '../../worker/core/lead210.ts'
import type { LeadProfile, LeadSlice } from '../../worker/core/lead210.ts'

const near = (value: number, expected: number, tolerance: number, what = '') =>
  expect(Math.abs(value - expected), `${what} ${value} against ${expected}`).toBeLessThanOrEqual(tolerance)

describe('half-lives (as compiled with their sources; 1e-9, derived)', () => {
  it.each([
    [22.2, 0.031222846],
    [22.23, 0.03118071],
    [22.26, 0.031138687],
    [22.3, 0.031082833],
  ])('210Pb %d a: lambda %d', (years, lambda) => near(decayConstant({ years, sigma: 0 }).value, lambda, 1e-9))

  it('the default is the DDEP evaluation, 22.23 +- 0.12 a (Chiste & Be 2007)', () => {
    expect(lead210HalfLife).toEqual({ years: 22.23, sigma: 0.12 })
    near(decayConstant(lead210HalfLife).sigma, 0.000168317, 1e-9)
  })

  it('137Cs left after 60 a: .250577 (30.05 a), .250923 (30.08 a)', () => {
    near(caesiumLeft(60), 0.250577, 1e-6)
    near(caesiumLeft(60, 30.08), 0.250923, 1e-6)
  })
})

const halfLife = { years: 22.23, sigma: 0 }
const lambda = decayConstant(halfLife).value

/** A core of constant supply P and slices of given years and mass: C = (P / lambda) (e^-lambda t1 - e^-lambda t2) / mass. */
function exactProfile(
  supply: number,
  slices: { from: number; to: number; mass: number }[],
  tailFrom: number | null,
): LeadProfile {
  let depth = 0
  return {
    slices: slices.map(({ from, to, mass }): LeadSlice => {
      const inventory = (supply / lambda) * (Math.exp(-lambda * from) - Math.exp(-lambda * to))
      const top = depth
      depth += 10
      return { top, base: depth, mass, total: inventory / mass, sigma: 1e-9 }
    }),
    supported: { value: 0, sigma: 0 },
    tail:
      tailFrom === null
        ? { value: 0, sigma: 0 }
        : { value: (supply / lambda) * Math.exp(-lambda * tailFrom), sigma: 0 },
    halfLife,
  }
}

describe('constant rate of supply (Appleby & Oldfield 1978)', () => {
  const even = Array.from({ length: 20 }, (_, i) => ({ from: 5 * i, to: 5 * i + 5, mass: 5 }))

  it('at a constant rate the bases of 5-year slices date to exactly 5, 10 ... 100 a (1e-9)', () => {
    const profile = exactProfile(100, even, 100)
    const activities = [92.5946, 79.2278, 67.7906, 58.0045, 49.6311, 42.4664]
    activities.forEach((c, i) => near(profile.slices[i].total, c, 5e-5))
    const { slices, whole, flux } = lead210Ages(profile)
    near(whole.value, 3207.111076, 1e-6)
    near(flux, 100, 1e-9)
    slices.forEach(({ age, rate }, i) => {
      near(age?.value ?? NaN, 5 * (i + 1), 1e-9)
      near(rate ?? NaN, 1, 1e-9)
    })
  })

  it('cut short at 100 a all ages are too old, the more so downcore, and it is said', () => {
    const { slices, warnings } = lead210Ages(exactProfile(100, even, null))
    const ages = slices.map(({ age }) => age?.value ?? Infinity)
    const expected = [5.2515, 10.5478, 15.8978, 21.3116, 26.8021]
    expected.forEach((age, i) => near(ages[i], age, 5e-5))
    near(ages[8], 49.9123, 5e-5)
    near(ages[12], 76.67, 5e-3)
    near(ages[16], 115.128, 5e-4)
    near(ages[17], 130.794, 5e-4)
    near(ages[18], 155.621, 5e-4)
    expect(slices[19].age).toBeNull()
    expect(warnings).toContain('below some slices nothing unsupported is left: they have no age')
    expect(warnings.join('\n')).toContain('ages beyond 150 a are not to be quoted')
  })

  it('a base that still holds unsupported 210Pb is extrapolated, or warned of where it cannot be', () => {
    const profile = { ...exactProfile(100, even, null), tail: null }
    const estimated = lead210Ages(profile)
    expect(estimated.tailFrom).toBe('estimated')
    // A straight line in ln C over equal slices of constant rate is exact but for the curvature inside a slice.
    near(estimated.tail.value, (100 / lambda) * Math.exp(-lambda * 100), 0.5)
    expect(estimated.warnings[0]).toContain('of the inventory lies below the last slice and was extrapolated')
    const three = lead210Ages({ ...profile, slices: profile.slices.slice(0, 3) })
    expect(three.tailFrom).toBe('none')
    expect(three.warnings[0]).toBe(
      'the last slice still holds unsupported 210Pb: the inventory is cut short and all ages are too old, the more so downcore; give the inventory below the base',
    )
  })

  it('at a changing rate ages and rates are exact; activity that rises downcore is flagged (Bq cm-2 and g cm-2 as Bq m-2, kg m-2)', () => {
    const changing = [
      { from: 0, to: 5, mass: 2.5, c: 277.7838, rate: 0.5 },
      { from: 5, to: 10, mass: 2.5, c: 237.6834, rate: 0.5 },
      { from: 10, to: 15, mass: 5, c: 101.6859, rate: 1 },
      { from: 15, to: 20, mass: 5, c: 87.0067, rate: 1 },
      { from: 20, to: 30, mass: 20, c: 34.5365, rate: 2 },
      { from: 30, to: 40, mass: 20, c: 25.285, rate: 2 },
      { from: 40, to: 50, mass: 10, c: 37.0234, rate: 1 },
      { from: 50, to: 60, mass: 10, c: 27.1057, rate: 1 },
      { from: 60, to: 80, mass: 20, c: 17.1867, rate: 1 },
      { from: 80, to: 100, mass: 10, c: 18.4243, rate: 0.5 },
      { from: 100, to: 120, mass: 10, c: 9.8755, rate: 0.5 },
    ]
    const profile = exactProfile(150, changing, 120)
    const { slices, whole, warnings } = lead210Ages(profile)
    near(whole.value, 4810.66661, 1e-4)
    const below = [
      0.411621, 0.3522, 0.301357, 0.257854, 0.18878, 0.13821, 0.101187, 0.074081, 0.039708, 0.021284, 0.011408,
    ]
    changing.forEach(({ to, c, rate }, i) => {
      near(profile.slices[i].total, c, 5e-5)
      near(slices[i].below.value / 10_000, below[i], 5e-7)
      near(slices[i].age?.value ?? NaN, to, 1e-9)
      near(slices[i].rate ?? NaN, rate, 1e-9)
    })
    expect(warnings).toEqual([
      'unsupported 210Pb rises downcore at slice 7: supply or rate changed; constant initial concentration and constant sedimentation do not hold',
    ])
  })

  it('error of an age (Appleby 2001, from memory; derived): 44.46 +- 1.757778 a, correlation of A and A0 kept (1e-6)', () => {
    const { value, sigma } = crsAge({ value: 5000, sigma: 150 }, { value: 1250, sigma: 80 })
    near(value, 44.46, 1e-6)
    near(sigma, 1.757778, 1e-6)
  })

  it('error of a rate: .649598 +- .060135 kg m-2 a-1 (relative errors in quadrature)', () => {
    const { value, sigma } = crsRate({ value: 1250, sigma: 80 }, { value: 60, sigma: 4 })
    near(value, 0.649598, 1e-6)
    near(sigma, 0.060135, 1e-6)
  })

  it('errors of slices are carried to the ages: about 1-2 a at 10 a and 8-90 a at 150 a (Binford 1990, abstract, 95 %)', () => {
    const noisy = exactProfile(
      100,
      Array.from({ length: 32 }, (_, i) => ({ from: 5 * i, to: 5 * i + 5, mass: 5 })),
      160,
    )
    const withErrors = {
      ...noisy,
      slices: noisy.slices.map((slice) => ({ ...slice, sigma: 0.04 * slice.total + 0.1 })),
    }
    const { slices } = lead210Ages({ ...withErrors, supported: { value: 0, sigma: 0.5 } })
    const error95 = (i: number) => 2 * (slices[i].age?.sigma ?? NaN)
    expect(error95(1)).toBeGreaterThan(0.5)
    expect(error95(1)).toBeLessThan(2)
    expect(error95(29)).toBeGreaterThan(8)
    expect(error95(29)).toBeLessThan(90)
  })
})

describe('other 210Pb models', () => {
  it('constant initial concentration: 36.542923 +- 2.733172 a', () => {
    const { value, sigma } = cicAge({ value: 250, sigma: 10 }, { value: 80, sigma: 6 })
    near(value, 36.542923, 1e-6)
    near(sigma, 2.733172, 1e-6)
  })

  it('constant flux, constant sedimentation: slope -0.25 per g cm-2 is .124722839 g cm-2 a-1', () => {
    near(cfcsRate(-0.25, halfLife), 0.124722839, 1e-9)
  })

  it('a published fit: excess = 14.9565 exp(-.4514 z) is .06908 cm a-1 with 22.23 a, .06886 with 22.3 a (USGS OFR 2004-1448)', () => {
    near(cfcsRate(-0.4514, halfLife), 0.06908, 5e-6)
    near(cfcsRate(-0.4514, { years: 22.3, sigma: 0 }), 0.06886, 5e-6)
  })

  it('another: ln-slope -.113868 per cm is .27383 cm a-1, and its 137Cs maximum .2830 cm a-1 (USGS OFR 2004-1448), 4 % apart', () => {
    const activities = [15.78, 14.08, 12.57, 11.21, 10.01, 8.93, 7.97, 7.11]
    const depths = activities.map((_, i) => 8.5 + i)
    const mean = (values: number[]) => values.reduce((a, b) => a + b, 0) / values.length
    const logs = activities.map(Math.log)
    const slope =
      depths.reduce((sum, z, i) => sum + (z - mean(depths)) * (logs[i] - mean(logs)), 0) /
      depths.reduce((sum, z) => sum + (z - mean(depths)) ** 2, 0)
    near(slope, -0.113868, 1e-6)
    near(cfcsRate(slope, halfLife), 0.27383, 5e-6)
    near(10.5 / (2000.6 - 1963.5), 0.283, 5e-5)
  })
})

describe('137Cs horizons (Pennington et al. 1973; Foucher et al. 2021; the southern maximum from memory)', () => {
  it('onset 1954 and maximum 1963 in the north, onset 1955 and maximum 1964/65 in the south, Chernobyl 1986, Fukushima 2011', () => {
    expect(caesiumHorizon('onset', 'north').year).toBe(1954)
    expect(caesiumHorizon('peak', 'north').year).toBe(1963)
    expect(caesiumHorizon('onset', 'south').year).toBe(1955)
    expect(caesiumHorizon('peak', 'south').year).toBe(1964.5)
    expect(caesiumHorizon('chernobyl', 'north').year).toBe(1986)
    expect(caesiumHorizon('fukushima', 'north').year).toBe(2011)
    expect(() => caesiumHorizon('chernobyl', 'south')).toThrow('there is no chernobyl level of 137Cs in the south')
  })
})
