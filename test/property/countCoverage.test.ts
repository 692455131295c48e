import { describe, expect, it } from 'vitest'
import { defaultSampler } from '../../worker/core/counterModel.ts'
import { coverageOver } from '../fixtures/countCoverage.ts'
import { usualCores } from '../fixtures/simulatedCounts.ts'

/*
 * A small share of the simulations in test/bench/counts.bench.ts, with shorter runs. Of 40 intervals at 95 %, 2 miss the
 * truth on average; 7 or more would do so once in 300 times.
 */
const cores = 40
const few = { ...defaultSampler, draws: 500, burnIn: 250 }

describe('the 95 % interval of the total over simulated cores and counters', () => {
  it('holds the true number of years with three counters, and is narrow', () => {
    const { outside, width, bias } = coverageOver(cores, 5000, usualCores, few)
    expect(outside.length, `seeds ${outside.join(', ')}`).toBeLessThan(7)
    // The counts themselves lie tens of years apart.
    expect(width).toBeLessThan(9)
    expect(Math.abs(bias)).toBeLessThan(1)
  }, 120_000)

  it('does not hold it when all counters share a bias; the interval with the systematic term does', () => {
    const { counting, withSystematic } = coverageOver(25, 6000, { ...usualCores, sharedBias: 0.02 }, few)
    expect(counting).toBeLessThan(0.6)
    expect(withSystematic).toBeGreaterThan(0.84)
  }, 120_000)

  it('holds it with two counters, whose marks cannot tell a miss from a false mark, by being wide', () => {
    const { outside, width } = coverageOver(16, 7000, { ...usualCores, counters: 2 }, few)
    expect(outside.length, `seeds ${outside.join(', ')}`).toBeLessThan(4)
    expect(width).toBeGreaterThan(15)
  }, 120_000)
})
