import { checkInteger } from '../check.ts'
import { seededRandom } from '../random.ts'
import type { Random } from '../random.ts'
import type { Work } from '../work.ts'
import { biasNodes } from './biasNodes.ts'
import type { BiasNode } from './biasNodes.ts'
import type { CountChain } from './countChain.ts'
import type { DateLikelihood } from './dates.ts'
import { nodeWeights } from './latticeBackward.ts'
import { latticeDefaults, latticeProblem } from './latticeProblem.ts'
import type { LatticeOptions, LatticeProblem } from './latticeProblem.ts'
import { afterDates, filteredRows, segmentLevels, segments } from './latticeSegment.ts'
import { RowArena } from './rowArena.ts'
import type { Row } from './rowArena.ts'
import type { StepLaws } from './stepLaws.ts'

/**
 * Whole chronologies drawn from the posterior: the astronomical year of every row of the counted layers, [samples x rows],
 * row-major. Forward filtering, backward sampling (Carter & Kohn 1994, Biometrika 81, 541). The same seed gives the same
 * years. Memory: 4 bytes a sample and level.
 */
export function* sampleYears(
  chain: CountChain,
  dates: readonly DateLikelihood[],
  samples: number,
  seed: number,
  options: LatticeOptions = latticeDefaults,
): Work<Int32Array> {
  checkInteger('number of samples', samples, 1, 100_000)
  const problem = latticeProblem(chain, dates, options)
  const nodes = yield* biasNodes(problem)
  const random = seededRandom(seed)
  const chosen = chooseNodes(nodes, samples, random)
  const x = new Int32Array(samples * chain.levels)
  const arena = new RowArena()
  for (const [n, node] of nodes.entries()) {
    const which = chosen.flatMap((one, s) => (one === n ? [s] : []))
    if (which.length === 0) continue
    for (let k = segments(problem) - 1; k >= 0; k--) {
      const rows = filteredRows(problem, node.pass, k, arena)
      const { from } = segmentLevels(problem, k)
      drawSegment(problem, node.pass.laws, { from, rows }, which, x, random)
    }
    drawAbove(problem, node.pass.laws, which, x, random)
    yield { stage: 'samples', done: n + 1, total: nodes.length }
  }
  return yearsOfRows(chain, x, samples)
}

/** The node of each sample, by posterior weight. */
function chooseNodes(nodes: readonly BiasNode[], samples: number, random: Random): number[] {
  const weights = nodeWeights(nodes)
  return Array.from({ length: samples }, () => pick(weights, random))
}

/** An index with the probability of its weight; the weights need not sum to 1. */
function pick(weights: ArrayLike<number>, random: Random): number {
  let total = 0
  for (let k = 0; k < weights.length; k++) total += weights[k]
  let left = random.uniform() * total
  let chosen = 0
  for (let k = 0; k < weights.length; k++) {
    if (!(weights[k] > 0)) continue
    chosen = k
    left -= weights[k]
    if (left < 0) break
  }
  return chosen
}

/** Draws the levels of a segment from below upwards, for some of the samples. */
function drawSegment(
  problem: LatticeProblem,
  laws: StepLaws,
  { from, rows }: { from: number; rows: readonly Row[] },
  which: readonly number[],
  x: Int32Array,
  random: Random,
): void {
  const { levels } = problem.chain
  for (let i = from + rows.length - 1; i >= from; i--) {
    const here = problem.datesAt.get(i)
    const row = here ? afterDates(problem, rows[i - from], here).row : rows[i - from]
    for (const s of which) {
      const at = s * levels + i
      x[at] =
        i === levels - 1
          ? row.low + pick(row.values.subarray(row.at, row.at + row.width), random)
          : x[at + 1] - drawStep(laws, i + 1, x[at + 1], row, random)
    }
  }
}

/** Above the first date every step is drawn from the count alone. */
function drawAbove(
  { chain, first }: LatticeProblem,
  laws: StepLaws,
  which: readonly number[],
  x: Int32Array,
  random: Random,
) {
  for (let i = first - 1; i >= 0; i--) {
    for (const s of which) {
      const at = s * chain.levels + i
      x[at] = x[at + 1] - drawStep(laws, i + 1, x[at + 1], null, random)
    }
  }
}

/** Years of step i that lead to `x`, by their law times the filtered probability of where they come from. */
function drawStep(laws: StepLaws, i: number, x: number, above: Row | null, random: Random): number {
  const gap = laws.gaps.get(i)
  if (gap) {
    const weights = gap.probability.map((p, k) => p * (above ? valueAt(above, x - gap.first - k) : 1))
    return gap.first + pick(weights, random)
  }
  const shift = laws.shift[i]
  const w0 = laws.tap[3 * i] * (above ? valueAt(above, x - shift) : 1)
  const w1 = laws.tap[3 * i + 1] * (above ? valueAt(above, x - shift - 1) : 1)
  const w2 = laws.tap[3 * i + 2] * (above ? valueAt(above, x - shift - 2) : 1)
  const drawn = random.uniform() * (w0 + w1 + w2)
  return shift + (drawn < w0 ? 0 : drawn < w0 + w1 ? 1 : 2)
}

function valueAt({ values, at, low, width }: Row, x: number): number {
  const k = x - low
  return k >= 0 && k < width ? values[at + k] : 0
}

function yearsOfRows({ levels, levelOfRow }: CountChain, x: Int32Array, samples: number): Int32Array {
  const rows = levelOfRow.length
  const years = new Int32Array(samples * rows)
  for (let s = 0; s < samples; s++) {
    for (let r = 0; r < rows; r++) years[s * rows + r] = -x[s * levels + levelOfRow[r]]
  }
  return years
}
