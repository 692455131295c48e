import { describe, expect, it } from 'vitest'
import { hpdRanges, yearFigures } from '../../worker/core/hpd.ts'
import { seededRandom } from '../../worker/random.ts'

/** Cells in order of probability until the level is reached: as the definition says, with a sort. */
function bySorting(p: Float64Array, level: number): boolean[] {
  const order = [...p.keys()].sort((a, b) => p[b] - p[a] || a - b)
  const taken = Array<boolean>(p.length).fill(false)
  let sum = 0
  for (const i of order) {
    if (sum >= level - 1e-12) break
    taken[i] = true
    sum += p[i]
  }
  return taken
}

describe('highest-density ranges', () => {
  it('equal a plain sort on 500 distributions with ties, plateaus and islands (seeds 1-500)', () => {
    for (let seed = 1; seed <= 500; seed++) {
      const random = seededRandom(seed)
      const raw = Float64Array.from({ length: 1 + random.below(60) }, () =>
        random.below(3) === 0 ? random.below(4) : random.uniform() ** 4,
      )
      raw[random.below(raw.length)] += 0.1
      const total = raw.reduce((a, b) => a + b, 0)
      const p = raw.map((one) => one / total)
      for (const level of [0.683, 0.954, 1]) {
        const taken = bySorting(p, level)
        const found = p.reduce<boolean[]>((all) => all, Array<boolean>(p.length).fill(false))
        const ranges = hpdRanges(p, 100, level)
        for (const { from, to } of ranges) for (let at = from; at <= to; at++) found[at - 100] = true
        expect(found, `seed ${seed} level ${level}`).toEqual(taken)
        const held = ranges.reduce((sum, { probability }) => sum + probability, 0)
        expect(held).toBeGreaterThanOrEqual(level - 1e-9)
      }
    }
  })

  it('of one certain year are that year', () => {
    expect(hpdRanges(Float64Array.of(0, 1, 0), 7, 0.954)).toEqual([{ from: 8, to: 8, probability: 1 }])
  })
})

describe('figures of a distribution', () => {
  it('are mean, SD, median and mode', () => {
    const { mean, sd, median, mode } = yearFigures(Float64Array.of(0.1, 0.2, 0.4, 0.3), 10)
    expect([mean, median, mode]).toEqual([11.9, 12, 12])
    expect(sd).toBeCloseTo(Math.sqrt(0.89), 12)
  })
})
