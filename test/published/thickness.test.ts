import { describe, expect, it } from 'vitest'
import { runningMean, thicknessSummary } from '../../worker/core/rates.ts'

/** Thickness from the top, mm; the figures below were worked out with numpy from these six values. */
const series = Float64Array.from([1.2, 0.9, 1.5, 0.7, 1.1, 1.3])

describe('a thickness series', () => {
  it('has mean 6.7 / 6, geometric mean 1.083906, CV 0.255917 (n - 1) and mean sensitivity 0.424820 (1e-6; numpy)', () => {
    const summary = thicknessSummary(series)!
    expect(summary.mean).toBeCloseTo(6.7 / 6, 12)
    expect(summary.geometricMean).toBeCloseTo(1.083906, 6)
    expect(summary.variation).toBeCloseTo(0.255917, 6)
    expect(summary.sensitivity).toBeCloseTo(0.42482, 6)
  })

  it('has the running mean of R’s Nile record, centred over 5: 1122.6 1130.6 1061.2 ... (stats::filter; Cobb 1978)', () => {
    const nile = Float64Array.from([
      1120, 1160, 963, 1210, 1160, 1160, 813, 1230, 1370, 1140, 995, 935, 1110, 994, 1020,
    ])
    const smooth = [...runningMean(nile, 5)].slice(2, 13)
    const expected = [1122.6, 1130.6, 1061.2, 1114.6, 1146.6, 1142.6, 1109.6, 1134.0, 1110.0, 1034.8, 1010.8]
    smooth.forEach((value, i) => expect(value).toBeCloseTo(expected[i], 9))
  })

  it('leaves out layers without a thickness of their own', () => {
    const gappy = Float64Array.from([1, NaN, 3])
    expect(thicknessSummary(gappy)).toMatchObject({ layers: 2, mean: 2, median: 2 })
    expect(thicknessSummary(gappy)!.sensitivity).toBeNaN()
    expect(thicknessSummary(Float64Array.from([NaN]))).toBeNull()
    expect(() => runningMean(gappy, NaN)).toThrow('window must be a whole number of at least 1; it is NaN')
  })
})
