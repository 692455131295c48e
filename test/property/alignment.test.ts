import { describe, expect, it } from 'vitest'
import { alignCounts, certain, doubtful, localThickness, type Alignment } from '../../worker/core/alignment.ts'
import type { CounterMarks } from '../../worker/core/counterMarks.ts'
import { seededRandom, type Random } from '../../worker/random.ts'

const options = { tolerance: 0.4, thicknessWindow: 8 }

function drawCounts(random: Random, counters: number, layers: number, jitter: number, spread: number): CounterMarks[] {
  const truth: number[] = []
  for (let i = 0, depth = 0; i < layers; i++) truth.push((depth += Math.exp(spread * random.normal())))
  return Array.from({ length: counters }, (_, k) => {
    const position = truth.flatMap((depth) => [
      ...(random.uniform() < 0.85 ? [depth + jitter * random.normal()] : []),
      ...(random.uniform() < 0.2 ? [depth + random.uniform()] : []),
    ])
    position.push(truth[0] - 0.1 * random.uniform(), truth[layers - 1] + 0.1 * random.uniform())
    position.sort((a, b) => a - b)
    return {
      name: `counter ${k}`,
      position: Float64Array.from(position),
      doubtful: Uint8Array.from(position, () => random.below(2)),
      range: null,
    }
  })
}

/** The cost the module states, of sites given as lists of marks. */
function costOf(sites: number[][], counters: number, reachAt: Map<number, number>): number {
  return sites.reduce((total, site) => {
    const mean = site.reduce((a, b) => a + b, 0) / site.length
    const squares = site.reduce((sum, x) => sum + (x - mean) ** 2, 0)
    const oddities = Math.min(site.length, counters - site.length)
    const reach = reachAt.get(Math.min(...site))!
    return Math.max(...site) - Math.min(...site) > reach
      ? Infinity
      : total + 1 + 1.5 * oddities + (8 * squares) / (reach * reach)
  }, 0)
}

/** Every order-preserving assignment, without knots, bands or canonical orders: the least cost by plain recursion over all subsets. */
function leastCost(counts: readonly CounterMarks[], reachAt: Map<number, number>): number {
  const known = new Map<string, number>()
  const from = (placed: number[]): number => {
    if (placed.every((n, k) => n === counts[k].position.length)) return 0
    const key = placed.join()
    const before = known.get(key)
    if (before !== undefined) return before
    let best = Infinity
    for (let subset = 1; subset < 1 << counts.length; subset++) {
      const members = counts.map((_, k) => k).filter((k) => (subset >> k) & 1)
      if (members.some((k) => placed[k] === counts[k].position.length)) continue
      const cost = costOf([members.map((k) => counts[k].position[placed[k]])], counts.length, reachAt)
      if (cost < best) best = Math.min(best, cost + from(placed.map((n, k) => n + ((subset >> k) & 1))))
    }
    known.set(key, best)
    return best
  }
  return from(counts.map(() => 0))
}

function sitesOf(alignment: Alignment, counts: readonly CounterMarks[]): number[][] {
  return Array.from(alignment.position, (_, s) =>
    counts.flatMap(({ position }, k) => {
      const mark = alignment.mark[s * counts.length + k]
      return mark < 0 ? [] : [position[mark]]
    }),
  )
}

describe('alignment', () => {
  it('finds the cheapest of all order-preserving assignments, on small cores of any kind', () => {
    for (let seed = 1; seed <= 300; seed++) {
      const random = seededRandom(seed)
      const counters = 2 + random.below(3)
      const counts = drawCounts(random, counters, 2 + random.below(counters === 4 ? 2 : 3), 0.3 * random.uniform(), 0.8)
      const pooled = counts.flatMap(({ position }) => [...position]).sort((a, b) => a - b)
      const thickness = localThickness(counts, Float64Array.from(pooled), options.thicknessWindow)
      const reachAt = new Map(pooled.map((x, i) => [x, options.tolerance * thickness[i]]))
      const found = costOf(sitesOf(alignCounts(counts, options), counts), counters, reachAt)
      expect(Math.abs(found - leastCost(counts, reachAt)), `seed ${seed}`).toBeLessThan(1e-9)
    }
  })

  it('does not depend on the order of the counters, ties included', () => {
    for (let seed = 1; seed <= 60; seed++) {
      const random = seededRandom(1000 + seed)
      const counts = drawCounts(random, 4, 40, 0.1, 0.5).map((count) => {
        // Rounded depths, so that equal distances and equal marks are common.
        const position = [...new Set([...count.position].map((x) => Math.round(5 * x) / 5))]
        return { ...count, position: Float64Array.from(position), doubtful: count.doubtful.slice(0, position.length) }
      })
      const straight = alignCounts(counts, options)
      const shuffled = counts.map((_, k) => k)
      for (let k = shuffled.length - 1; k > 0; k--) {
        const other = random.below(k + 1)
        ;[shuffled[k], shuffled[other]] = [shuffled[other], shuffled[k]]
      }
      const turned = alignCounts(
        shuffled.map((k) => counts[k]),
        options,
      )
      expect(turned.position, `seed ${seed}`).toEqual(straight.position)
      const back = (column: ArrayLike<number>) =>
        Array.from(straight.position, (_, s) => counts.map((_count, k) => column[s * 4 + shuffled.indexOf(k)])).flat()
      expect(back(turned.mark), `seed ${seed}`).toEqual([...straight.mark])
      expect(back(turned.label), `seed ${seed}`).toEqual([...straight.label])
    }
  })

  it('places every mark once, in order, with its own label', () => {
    for (let seed = 1; seed <= 20; seed++) {
      const counts = drawCounts(seededRandom(2000 + seed), 5, 200, 0.08, 0.5)
      const alignment = alignCounts(counts, options)
      for (const [k, count] of counts.entries()) {
        const sites = Array.from(alignment.position, (_, s) => s).filter((s) => alignment.mark[s * 5 + k] >= 0)
        expect(
          sites.map((s) => alignment.mark[s * 5 + k]),
          `seed ${seed}`,
        ).toEqual([...count.position.keys()])
        const labels = sites.map((s) => alignment.label[s * 5 + k])
        expect(labels, `seed ${seed}`).toEqual([...count.doubtful].map((one) => (one ? doubtful : certain)))
      }
      for (let s = 1; s < alignment.position.length; s++) {
        expect(alignment.position[s], `seed ${seed}`).toBeGreaterThan(alignment.position[s - 1])
      }
    }
  })
})
