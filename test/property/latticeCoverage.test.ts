import { describe, expect, it } from 'vitest'
import { builtInCurve, yearlyCurve } from '../../worker/core/curve.ts'
import { coverage } from '../fixtures/datedCore.ts'

/**
 * A small version of test/bench/lattice.bench.ts, which draws 400 cores: in 60 cores a coverage of 95.4 % has a binomial
 * SD of 2.7 % at each quartile.
 */
describe('95.4 % ranges hold the truth', () => {
  const curve = yearlyCurve(builtInCurve())
  it.each([
    ['random counts', 0],
    ['biased counts', 0.02],
  ])('%s with outliers among the dates: at every quarter of the depth, 60 cores from seed 1', (_, biasSd) => {
    const shares = coverage(
      { cores: 60, layers: 400, biasSd, assumedSd: biasSd, dates: 5, outliers: 0.05, seed: 1 },
      curve,
    )
    for (const share of shares) expect(share, JSON.stringify(shares)).toBeGreaterThan(0.88)
    // Ranges that always hold the truth are too wide.
    expect(Math.min(...shares)).toBeLessThan(1)
  })
})
