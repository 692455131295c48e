import { describe, expect, it } from 'vitest'
import { fitFrom, latentClassFits, majorityStart, shareStart, type Readings } from '../../worker/core/latentClass.ts'

/**
 * Ratings of 45 patients by five anaesthetists (Dawid & Skene 1979, Table 1): observer 1's three readings, then one reading
 * of each of observers 2 to 5.
 */
const anaesthetists = `111 1 1 1 1|333 4 3 3 4|112 2 1 2 2|222 3 1 2 1|222 3 2 2 2|222 3 3 2 2|122 2 1 1 1|333 3 4 3 3
222 2 2 2 3|232 2 2 2 3|444 4 4 4 4|222 3 3 4 3|111 1 1 1 1|222 3 2 1 2|121 1 1 1 1|111 2 1 1 1|111 1 1 1 1|111 1 1 1 1
222 2 2 2 1|222 1 3 2 2|222 2 2 2 2|222 2 2 2 1|222 3 2 2 2|221 2 2 2 2|111 1 1 1 1|111 1 1 1 1|232 2 2 2 2|111 1 1 1 1
111 1 1 1 1|112 1 1 2 1|111 1 1 1 1|333 3 2 3 3|111 1 1 1 1|222 2 2 2 2|222 3 2 3 2|433 4 3 4 3|221 2 2 3 2|232 3 2 3 3
333 3 4 3 2|111 1 1 1 1|111 1 1 1 1|121 2 1 1 1|232 2 2 2 2|121 1 1 1 1|222 2 2 2 2`

function readingsOf(text: string): Readings {
  const items = text.split(/[|\n]/)
  const times = new Float64Array(items.length * 5 * 4)
  for (const [i, item] of items.entries()) {
    for (const [k, token] of item.trim().split(' ').entries())
      for (const digit of token) times[(i * 5 + k) * 4 + Number(digit) - 1]++
  }
  return { items: items.length, observers: 5, labels: 4, times, weight: null }
}

const published = `.8895 .1105 0 0 .0706 .8764 .0530 0 0 .3388 .6612 0 0 0 .5556 .4444
.8342 .1658 0 0 .0527 .6329 .3143 0 0 0 1 0 0 0 0 1
1 0 0 0 .1064 .7883 .1053 0 0 .4037 .1988 .3976 0 0 .6667 .3333
.9444 .0556 0 0 .0537 .8426 .1037 0 0 0 .8012 .1988 0 0 .3333 .6667
1 0 0 0 .1590 .7345 .1064 0 0 .2091 .7909 0 0 0 .3333 .6667`

const near = (value: number, expected: number, tolerance: number) =>
  expect(Math.abs(value - expected)).toBeLessThan(tolerance)

describe('latent classes: Dawid & Skene 1979, Appl. Statist. 28, 20-28', () => {
  const readings = readingsOf(anaesthetists)
  const share = shareStart(readings)
  const fit = fitFrom(readings, share)

  it('reaches the log-likelihood and prevalences from the share start (recomputed with numpy; prevalences .40 .42 .11 .07 in the paper, from memory)', () => {
    expect(readings.items).toBe(45)
    near(fit.firstLogLikelihood, -205.091138, 1e-5)
    near(fit.logLikelihood, -192.890881, 1e-5)
    for (const [j, p] of [0.3996, 0.422, 0.1118, 0.0667].entries()) near(fit.prevalence[j], p, 2e-4)
  })

  it('reaches the rates of every observer (2e-4, the digits quoted)', () => {
    const expected = published.split(/\s/).map(Number)
    expect(expected).toHaveLength(80)
    for (const [at, rate] of expected.entries()) near(fit.rates[at], rate, 2e-4)
  })

  it('is sure of every patient but 7, 35 and 38 (1e-3)', () => {
    const row = (patient: number) => [...fit.posterior.subarray((patient - 1) * 4, patient * 4)]
    for (const [patient, posterior] of [
      [7, [0.981, 0.019, 0, 0]],
      [35, [0, 0.948, 0.052, 0]],
      [38, [0, 0.021, 0.979, 0]],
    ] as const) {
      for (const [j, p] of posterior.entries()) near(row(patient)[j], p, 1e-3)
    }
    const sizes = [0, 0, 0, 0]
    for (let patient = 1; patient <= 45; patient++) {
      if (![7, 35, 38].includes(patient)) expect(Math.max(...row(patient))).toBeGreaterThan(0.999)
      sizes[row(patient).indexOf(Math.max(...row(patient)))]++
    }
    expect(sizes).toEqual([18, 19, 5, 3])
  })

  it('stops at a worse hill from the majority start, which the choice among starts avoids (1e-5)', () => {
    const worse = fitFrom(readings, majorityStart(readings, share))
    near(worse.logLikelihood, -193.97464, 1e-5)
    for (const [j, p] of [0.3997, 0.467, 0.1111, 0.0222].entries()) near(worse.prevalence[j], p, 2e-4)
    const { best, starts } = latentClassFits(readings)
    expect(best.logLikelihood).toBeGreaterThan(-192.890882)
    expect(starts.map(({ name }) => name).slice(0, 2)).toEqual(['share of readings', 'majority of readings'])
  })

  it('patient 7 read as 1, 1, 2, as another transcription has it: log-likelihood -190.730997, observer 1 .9074 .0926', () => {
    const variant = readingsOf(anaesthetists.replace('122 2 1 1 1', '112 2 1 1 1'))
    const { logLikelihood, rates } = fitFrom(variant, shareStart(variant))
    near(logLikelihood, -190.730997, 1e-5)
    near(rates[0], 0.9074, 2e-4)
    near(rates[1], 0.0926, 2e-4)
  })
})

describe('two classes, three counters, 120 candidates (recomputed with numpy, 1e-4)', () => {
  const patterns = ['111', '110', '101', '011', '100', '010', '001', '000']
  const readings: Readings = {
    items: 8,
    observers: 3,
    labels: 2,
    times: Float64Array.from(
      patterns.flatMap((pattern) => Array.from(pattern).flatMap((mark) => (mark === '1' ? [0, 1] : [1, 0]))),
    ),
    weight: Float64Array.from([70, 8, 6, 5, 4, 3, 5, 19]),
  }
  const fit = fitFrom(readings, majorityStart(readings, shareStart(readings)))

  it('finds prevalence, sensitivities and false-mark rates', () => {
    near(fit.logLikelihood, -168.838519, 1e-4)
    near(fit.prevalence[1], 0.736168, 1e-4)
    const rate = (k: number, j: number) => fit.rates[(k * 2 + j) * 2 + 1]
    for (const [k, p] of [0.941067, 0.93136, 0.902607].entries()) near(rate(k, 1), p, 1e-4)
    for (const [k, p] of [0.153696, 0.117609, 0.19784].entries()) near(rate(k, 0), p, 1e-4)
  })

  it('finds the probability of each pattern and the expected number of layers', () => {
    const real = [0.998383, 0.942617, 0.858422, 0.875314, 0.138938, 0.157414, 0.064509, 0.001832]
    let years = 0
    let variance = 0
    for (const [i, p] of real.entries()) {
      const found = fit.posterior[i * 2 + 1]
      near(found, p, 1e-4)
      years += readings.weight![i] * found
      variance += readings.weight![i] * found * (1 - found)
    }
    near(years, 88.340164, 1e-4)
    near(variance, 3.033577, 1e-4)
  })
})
