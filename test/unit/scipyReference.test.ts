import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { movingMean, movingMedian } from '../../worker/core/movingWindow.ts'
import { findPeaks, type PeakRules } from '../../worker/core/peaks.ts'
import { gaussianSmooth, savitzkyGolay } from '../../worker/core/smoothing.ts'

/** Made by test/fixtures/scipy/generate.py; seed and versions stand in the file. Values are rounded to 9 digits. */
interface Reference {
  made: { seed: number; numpy: string; scipy: string }
  signals: Record<string, number[]>
  peaks: Record<
    string,
    (Record<'index' | 'prominence' | 'leftBase' | 'rightBase' | 'width' | 'leftEdge' | 'rightEdge', number[]> & {
      rules: PeakRules
    })[]
  >
  smoothed: { length: number; degree: number; derivative: number; values: number[] }[]
  median: { length: number; values: number[] }[]
  mean: { length: number; values: number[] }[]
  gaussian: { sigma: number; values: number[] }[]
}

const path = new URL('../fixtures/scipy/reference.json', import.meta.url)
const reference = JSON.parse(readFileSync(path, 'utf8')) as Reference
const rough = Float64Array.from(reference.signals.rough.slice(0, 120))

function expectClose(found: ArrayLike<number>, expected: number[], from = 0, to = expected.length): void {
  expect(found.length).toBe(expected.length)
  for (let i = from; i < to; i++) {
    expect(Math.abs(found[i] - expected[i]), `sample ${i}: ${found[i]}, scipy ${expected[i]}`).toBeLessThan(1e-8)
  }
}

describe(`scipy ${reference.made.scipy} as a second opinion`, () => {
  for (const [name, cases] of Object.entries(reference.peaks)) {
    const signal = Float64Array.from(reference.signals[name])
    for (const { rules, ...expected } of cases) {
      it(`peaks of the ${name} signal by ${JSON.stringify(rules)} are scipy's`, () => {
        const peaks = findPeaks(signal, rules)
        expect([...peaks.index]).toEqual(expected.index)
        expect(expected.index.length).toBeGreaterThan(5)
        expect([...peaks.leftBase]).toEqual(expected.leftBase)
        expect([...peaks.rightBase]).toEqual(expected.rightBase)
        expectClose(peaks.prominence, expected.prominence)
        expectClose(peaks.width, expected.width)
        expectClose(peaks.leftEdge, expected.leftEdge)
        expectClose(peaks.rightEdge, expected.rightEdge)
      })
    }
  }

  for (const { length, degree, derivative, values } of reference.smoothed) {
    it(`Savitzky-Golay over ${length} samples, degree ${degree}, derivative ${derivative}, ends included`, () => {
      expectClose(savitzkyGolay(rough, length, degree, derivative), values)
    })
  }

  for (const { length, values } of reference.median) {
    it(`moving median of ${length}, away from the ends, where scipy pads with zeros`, () => {
      const half = (length - 1) / 2
      expectClose(movingMedian(rough, half), values, half, rough.length - half)
    })
  }

  for (const { length, values } of reference.mean) {
    it(`moving mean of ${length}, away from the ends, where scipy repeats the last sample`, () => {
      const half = (length - 1) / 2
      expectClose(movingMean(rough, half), values, half, rough.length - half)
    })
  }

  for (const { sigma, values } of reference.gaussian) {
    it(`Gaussian of standard deviation ${sigma}, renormalised at the ends`, () => {
      expectClose(gaussianSmooth(rough, sigma), values)
    })
  }
})
