import { describe, expect, it } from 'vitest'
import { transform, transformBack } from '../../worker/core/fourier.ts'
import { longWaves, raisedCosine } from '../../worker/core/highPass.ts'
import { slidingSpectrum } from '../../worker/core/slidingSpectrum.ts'
import { finish } from '../../worker/work.ts'
import { seededRandom } from '../../worker/random.ts'

const sine = (rows: number, period: number, strength = 1, phase = 0.3) =>
  Float64Array.from({ length: rows }, (_, i) => strength * Math.sin((2 * Math.PI * i) / period + phase))

describe('the Fourier transform', () => {
  it('has e^(-i) forward and gives the column back', () => {
    const column = Float64Array.from({ length: 64 }, (_, i) => Math.sin((2 * Math.PI * 3 * i) / 64))
    const { real, imaginary } = transform(column)
    // sin has -i N / 2 at its positive frequency.
    expect(real[3]).toBeCloseTo(0, 9)
    expect(imaginary[3]).toBeCloseTo(-32, 9)
    expect(imaginary[61]).toBeCloseTo(32, 9)
    transformBack({ real, imaginary }).forEach((value, i) => expect(value).toBeCloseTo(column[i], 12))
  })

  it('refuses lengths it would be slow at', () => {
    expect(() => transform(new Float64Array(100))).toThrow('a Fourier transform takes a power of two; it is given 100')
  })
})

describe('long waves', () => {
  const size = (column: ArrayLike<number>, from: number, to: number) => {
    let most = 0
    for (let i = from; i < to; i++) most = Math.max(most, Math.abs(column[i]))
    return most
  }

  it('keep what is longer than the cut-off and lose what is shorter', () => {
    const long = longWaves(sine(4000, 400), 100)
    sine(4000, 400).forEach((value, i) => {
      if (i > 200 && i < 3800) expect(Math.abs(long[i] - value)).toBeLessThan(0.02)
    })
    expect(size(longWaves(sine(4000, 40), 100), 200, 3800)).toBeLessThan(0.02)
    // At the cut-off itself half is kept.
    expect(size(longWaves(sine(4000, 100), 100), 1000, 3000)).toBeCloseTo(0.5, 1)
  })

  it('have a raised-cosine edge', () => {
    expect([-1, 0, 0.5, 1, 2].map(raisedCosine)).toEqual([0, 0, 0.49999999999999994, 1, 1])
  })

  it('do not ring at the ends of a column that begins and ends at different levels', () => {
    const ramp = Float64Array.from({ length: 1000 }, (_, i) => 100 + 0.1 * i)
    const trend = longWaves(ramp, 50)
    ramp.forEach((value, i) => expect(Math.abs(trend[i] - value)).toBeLessThan(1.5))
    for (let i = 100; i < 900; i++) expect(Math.abs(trend[i] - ramp[i])).toBeLessThan(0.1)
  })

  it('leave gaps open, and hold up with nothing but gaps', () => {
    const column = sine(500, 100).fill(NaN, 200, 220)
    const trend = longWaves(column, 50)
    expect(trend.findIndex((value) => Number.isNaN(value))).toBe(200)
    expect(trend.filter((value) => Number.isNaN(value)).length).toBe(20)
    expect(longWaves(new Float64Array(5).fill(NaN), 3).every((value) => Number.isNaN(value))).toBe(true)
  })
})

describe('the sliding spectrum', () => {
  const rules = { window: 256, step: 64, shortest: 4, longest: 128, periodsPerOctave: 12 }

  it('is strongest at the period the signal has, position by position', () => {
    const signal = Float64Array.from([...sine(2000, 12), ...sine(2000, 40)])
    const { position, period, power } = finish(slidingSpectrum(signal, rules))
    expect(position[0]).toBe(128)
    for (const [at, expected] of [
      [800, 12],
      [3200, 40],
    ]) {
      const p = position.findIndex((value) => value >= at)
      const row = power.subarray(p * period.length, (p + 1) * period.length)
      const best = period[row.indexOf(row.reduce((most, value) => Math.max(most, value), 0))]
      expect(Math.abs(Math.log2(best / expected))).toBeLessThan(0.1)
    }
  })

  it('has the variance of the signal as its area over the logarithm of the period', () => {
    const random = seededRandom(4)
    const signal = Float64Array.from({ length: 40_000 }, () => 3 * random.normal())
    const fine = { window: 512, step: 256, shortest: 2, longest: 512, periodsPerOctave: 24 }
    const { position, period, power } = finish(slidingSpectrum(signal, fine))
    let area = 0
    for (const value of power) area += value
    const logStep = Math.LN2 / 24
    expect(((area / position.length) * logStep) / 9).toBeCloseTo(1, 1)
    expect(period[0]).toBe(2)
  })

  it('is unknown where more than half of the window is unreadable, and measures around smaller gaps', () => {
    const signal = sine(2000, 16).fill(NaN, 900, 1100).fill(NaN, 300, 310)
    const { position, period, power } = finish(slidingSpectrum(signal, rules))
    const known = Array.from(position, (_, p) => !Number.isNaN(power[p * period.length]))
    expect(known[0]).toBe(true)
    for (const [p, at] of position.entries()) if (Math.abs(at - 1000) < 50) expect(known[p]).toBe(false)
  })

  it('refuses periods that the window cannot show, and is empty for a signal shorter than the window', () => {
    expect(() => finish(slidingSpectrum(sine(500, 9), { ...rules, longest: 300 }))).toThrow(
      'longest period must be between 4 and 256; it is 300',
    )
    expect(finish(slidingSpectrum(sine(100, 9), rules)).position.length).toBe(0)
  })
})
