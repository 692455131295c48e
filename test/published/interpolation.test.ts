import { describe, expect, it } from 'vitest'
import { renewalYears } from '../../worker/core/unreadableYears.ts'

const near = (value: number, expected: number) => expect(Math.abs(value - expected)).toBeLessThan(1e-6)

describe('years in an unreadable gap: renewal theorem (Cox 1962), error of the mean thickness added (derived, 1e-6)', () => {
  it('25 mm at 0.83 +- 0.75 mm (the thickness published for Lake Szurpily), 50 varves: 30.120482 +- 6.277705', () => {
    const { mean, variance } = renewalYears(25, 0.83, 0.75, 50)
    near(mean, 30.120482)
    near(Math.sqrt(variance), 6.277705)
    // The parts: scatter of thickness inside the gap, and the error of the mean.
    near(Math.sqrt(renewalYears(25, 0.83, 0.75, 1e12).variance), 4.959229)
    near(Math.sqrt(variance - renewalYears(25, 0.83, 0.75, 1e12).variance), 3.849108)
  })

  it('20 mm at 1.25 mm with a coefficient of variation of 0.3, 40 varves: 16 +- 1.419859', () => {
    const { mean, variance } = renewalYears(20, 1.25, 0.375, 40)
    near(mean, 16)
    near(Math.sqrt(variance), 1.419859)
    near(Math.sqrt(renewalYears(20, 1.25, 0.375, 1e12).variance), 1.2)
  })

  it('12 mm between 1.0 and 1.5 mm a year: 12 and 8 years by the two ends, never the mean of the two unsaid', () => {
    near(renewalYears(12, 1, 0, 1).mean, 12)
    near(renewalYears(12, 1.5, 0, 1).mean, 8)
    near(renewalYears(12, 1.25, 0, 1).mean, 9.6)
  })
})
