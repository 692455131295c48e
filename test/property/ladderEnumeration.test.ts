import { describe, expect, it } from 'vitest'
import { bedTail } from '../../worker/core/layerPairs.ts'
import type { YearLaw } from '../../worker/core/layerPairs.ts'
import { mostProbableLadder } from '../../worker/core/mostProbableLadder.ts'
import { forwardBackward } from '../../worker/core/semiMarkov.ts'
import type { Stretch } from '../../worker/core/semiMarkov.ts'
import { densityAt, emptyStretch, recurrenceAt, survivalAt, thicknessLaw } from '../../worker/core/thicknessLaw.ts'
import { yearDistribution } from '../../worker/core/yearDistribution.ts'
import { seededRandom } from '../../worker/random.ts'
import type { Random } from '../../worker/random.ts'

/** A stretch of a few sites with gaps from nothing to far beyond the table of the law, odds from 1e-4 to 1e4. */
function drawStretch(random: Random, sites: number): Stretch {
  const u = new Float64Array(sites)
  let at = random.uniform()
  for (let i = 0; i < sites; i++) {
    const kind = random.uniform()
    at +=
      kind < 0.1 ? 0 : kind < 0.85 ? 0.8 * random.uniform() : kind < 0.95 ? 2 * random.uniform() : 20 * random.uniform()
    u[i] = at
  }
  const weight = u.map(() => Math.exp(3 * random.normal()))
  const forced = new Uint8Array(sites)
  if (random.uniform() < 0.5) forced[random.below(sites)] = 1
  const shows = u.map(() => (random.uniform() < 0.6 ? 1 : 0))
  const expected = u.map(() => 0.3 * random.normal())
  return { u, weight, forced, shows: Uint8Array.from(shows), expected, start: 0, end: at + random.uniform() }
}

function drawLaw(random: Random): YearLaw {
  const raw = Array.from({ length: 16 }, () => 0.2 + random.uniform())
  const mean = raw.reduce((total, one) => total + one, 0) / raw.length
  return {
    trust: random.uniform() < 0.5 ? 1 : 0.4 + 0.6 * random.uniform(),
    thickness: thicknessLaw(0.1 + 0.5 * random.uniform(), 0.02 * random.uniform()),
    inner: {
      rate: random.uniform(),
      number: Float64Array.from({ length: 4 }, () => random.uniform()),
      phase: Float64Array.from(raw, (one) => one / mean),
    },
  }
}

/** Weight of two sites as the boundaries of one year, straight from the definition. */
function yearWeight({ u, shows, expected }: Stretch, law: YearLaw, i: number, j: number): number {
  const d = u[j] - u[i]
  if (d > law.thickness.longest) return bedTail(law, d)
  const held = Math.min(d * Math.exp(-expected[i]), law.thickness.longest)
  let weight = densityAt(law.thickness, held) * Math.exp(-expected[i])
  const inside = shows.subarray(i + 1, j).reduce((total, one) => total + one, 0)
  weight *= law.inner.number[Math.min(3, inside)]
  for (let k = i + 1; k < j; k++) {
    if (shows[k] === 1 && weight > 0) weight *= law.inner.phase[Math.min(15, Math.floor((16 * (u[k] - u[i])) / d))] / d
  }
  return weight ** law.trust
}

/** Every subset of the sites with its weight. */
function enumerate(stretch: Stretch, law: YearLaw) {
  const { u, weight, forced, start, end } = stretch
  const { thickness } = law
  const n = u.length
  const ladders: { sites: number[]; weight: number }[] = []
  for (let set = 0; set < 2 ** n; set++) {
    const sites = [...u.keys()].filter((i) => (set >> i) & 1)
    if (forced.some((one, i) => one === 1 && !sites.includes(i))) continue
    let product =
      sites.length === 0 ? emptyStretch(thickness, end - start) : recurrenceAt(thickness, u[sites[0]] - start)
    for (const [k, site] of sites.entries()) {
      product *= weight[site]
      product *=
        k + 1 < sites.length ? yearWeight(stretch, law, site, sites[k + 1]) : survivalAt(thickness, end - u[site])
    }
    ladders.push({ sites, weight: product })
  }
  return ladders
}

const sum = (values: Iterable<number>) => [...values].reduce((total, one) => total + one, 0)

describe('the semi-Markov ladder equals enumeration of every subset of its sites', () => {
  for (let seed = 1; seed <= 60; seed++) {
    it(`seed ${seed}: marginals, total, best ladder, distribution of the count`, () => {
      const random = seededRandom(seed)
      const stretch = drawStretch(random, 1 + random.below(11))
      const law = drawLaw(random)
      const ladders = enumerate(stretch, law)
      const total = sum(ladders.map((one) => one.weight))
      const messages = forwardBackward(stretch, law)
      expect(messages.logTotal).toBeCloseTo(Math.log(total), 9)
      const n = stretch.u.length
      for (let i = 0; i < n; i++) {
        const share = sum(ladders.filter(({ sites }) => sites.includes(i)).map((one) => one.weight)) / total
        expect(Math.abs(messages.probability[i] - share)).toBeLessThan(1e-9)
      }
      const best = ladders.reduce((a, b) => (b.weight > a.weight ? b : a))
      const found = mostProbableLadder(stretch, law, messages)
      const weightFound = ladders.find(({ sites }) => sites.join() === found.join())!.weight
      expect(weightFound / best.weight).toBeCloseTo(1, 9)
      const from = random.below(n + 1)
      const to = from + random.below(n + 1 - from)
      for (const [low, high] of [
        [0, n],
        [from, to],
      ]) {
        const counts = new Float64Array(n + 1)
        for (const { sites, weight } of ladders)
          counts[sites.filter((i) => i >= low && i < high).length] += weight / total
        const { first, probability } = yearDistribution(stretch, law, messages, low, high)
        for (let k = 0; k <= n; k++) expect(Math.abs((probability[k - first] ?? 0) - counts[k])).toBeLessThan(1e-9)
      }
    })
  }
})
