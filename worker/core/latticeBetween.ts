import { checkInteger } from '../check.ts'
import type { Work } from '../work.ts'
import { biasNodes } from './biasNodes.ts'
import type { BiasNode } from './biasNodes.ts'
import type { CountChain } from './countChain.ts'
import type { DateLikelihood } from './dates.ts'
import { nodeWeights } from './latticeBackward.ts'
import { segmentLength } from './latticeForward.ts'
import { latticeDefaults, latticeProblem } from './latticeProblem.ts'
import type { LatticeOptions, LatticeProblem } from './latticeProblem.ts'
import { afterDates, filteredRows, gather, segmentLevels, stepUp } from './latticeSegment.ts'
import { emptyRow, RowArena } from './rowArena.ts'
import type { Row } from './rowArena.ts'
import type { StepLaws, WholeYears } from './stepLaws.ts'

/** Nodes and years that hold less than this share add nothing that shows. */
const negligible = 1e-12

/**
 * The exact distribution of the number of years between two rows of the counted layers, given all dates: their ages share
 * most of their error, so it is much narrower than the difference of the two. `upper` lies above `lower`.
 */
export function* yearsBetweenRows(
  chain: CountChain,
  dates: readonly DateLikelihood[],
  upper: number,
  lower: number,
  options: LatticeOptions = latticeDefaults,
): Work<WholeYears> {
  checkInteger('upper row', upper, 0, chain.levelOfRow.length - 1)
  checkInteger('lower row', lower, upper, chain.levelOfRow.length - 1)
  const problem = latticeProblem(chain, dates, options)
  const nodes = yield* biasNodes(problem)
  const weights = nodeWeights(nodes)
  const from = chain.levelOfRow[upper]
  const to = chain.levelOfRow[lower]
  const sum = new Map<number, number>()
  for (const [k, node] of nodes.entries()) {
    if (weights[k] < negligible) continue
    const { first, probability } = betweenLevels(problem, node, from, to)
    for (const [years, p] of probability.entries()) {
      sum.set(first + years, (sum.get(first + years) ?? 0) + weights[k] * p)
    }
    yield { stage: 'years between', done: k + 1, total: nodes.length }
  }
  return asColumns(sum)
}

function asColumns(sum: ReadonlyMap<number, number>): WholeYears {
  const kept = [...sum].filter(([, p]) => p > negligible).sort((a, b) => a[0] - b[0])
  const first = kept[0][0]
  const probability = new Float64Array(kept[kept.length - 1][0] - first + 1)
  const total = kept.reduce((all, [, p]) => all + p, 0)
  for (const [years, p] of kept) probability[years - first] = p / total
  return { first, probability }
}

/** The same for one value of the bias. Between dated levels, only the law of the years counts, whatever x they start from. */
function betweenLevels(problem: LatticeProblem, { pass }: BiasNode, from: number, to: number): WholeYears {
  if (from === to) return { first: 0, probability: Float64Array.of(1) }
  // Above the first date of a floating count nothing but the count speaks.
  if (to < problem.first) return yearsOfSteps(pass.laws, from, to)
  const inner = [...problem.datesAt.keys()].filter((level) => level > from && level < to).sort((a, b) => a - b)
  const stops = [...inner, to]
  const laws = stops.map((level, k) => yearsOfSteps(pass.laws, k === 0 ? from : stops[k - 1], level))
  const below = belowAt(problem, pass.laws, pass, to)
  const start = from < problem.first ? flatStart(pass.laws, below, from, to) : filteredAt(problem, pass, from)
  const most = start.values.reduce((a, b) => Math.max(a, b), 0)
  const sum = new Map<number, number>()
  let total = 0
  for (let k = 0; k < start.width; k++) {
    const weight = start.values[start.at + k]
    if (!(weight > negligible * most)) continue
    const x = start.low + k
    let row = emptyRow(x, 1)
    row.values[row.at] = weight
    for (const [s, level] of stops.entries()) {
      const next = emptyRow(row.low + laws[s].first, row.width + laws[s].probability.length - 1)
      gather(row, next, laws[s])
      row = level === to ? next : unscaled(problem, next, level)
    }
    for (let j = 0; j < row.width; j++) {
      const p = row.values[row.at + j] * cell(below, row.low + j)
      if (p > 0) sum.set(row.low + j - x, (sum.get(row.low + j - x) ?? 0) + p)
      total += p
    }
  }
  for (const [years, p] of sum) sum.set(years, p / total)
  return asColumns(sum)
}

function cell({ values, at, low, width }: Row, x: number): number {
  return x >= low && x < low + width ? values[at + x - low] : 0
}

/** A row times the likelihoods of a level, unlike afterDates not scaled: rows of different beginnings are added up. */
function unscaled(problem: LatticeProblem, row: Row, level: number): Row {
  const { row: met, logSum } = afterDates(problem, row, problem.datesAt.get(level) ?? [])
  const scale = Math.exp(logSum)
  for (let k = met.at; k < met.at + met.width; k++) met.values[k] *= scale
  return met
}

/** The law of the years from one level to another by the count alone. */
function yearsOfSteps(laws: StepLaws, from: number, to: number): WholeYears {
  let row = emptyRow(0, 1)
  row.values[row.at] = 1
  for (let i = from + 1; i <= to; i++) {
    const law = laws.gaps.get(i) ?? { first: laws.shift[i], probability: laws.tap.slice(3 * i, 3 * i + 3) }
    const next = emptyRow(row.low + law.first, row.width + law.probability.length - 1)
    gather(row, next, law)
    row = withoutEnds(next)
  }
  return { first: row.low, probability: row.values.slice(row.at, row.at + row.width) }
}

function withoutEnds(row: Row): Row {
  let { at, low, width } = row
  const least = 1e-18
  while (width > 1 && row.values[at + width - 1] < least) width--
  while (width > 1 && row.values[at] < least) {
    at++
    low++
    width--
  }
  if (width === row.width) return row
  const cut = emptyRow(low, width)
  cut.values.set(row.values.subarray(at, at + width), cut.at)
  return cut
}

/** The likelihood of all dates at and below a level, over its band; 1 below the last date. */
function belowAt(problem: LatticeProblem, laws: StepLaws, { low, width }: BiasNode['pass'], level: number): Row {
  const base = Math.max(level, problem.last)
  let row = emptyRow(low[base], width[base])
  row.values.fill(1, row.at, row.at + row.width)
  for (let i = base; i >= level; i--) {
    if (i < base) {
      const above = emptyRow(low[i], width[i])
      stepUp(row, above, laws, i + 1)
      row = above
    }
    const here = problem.datesAt.get(i)
    if (here) row = afterDates(problem, row, here).row
  }
  return row
}

/** The filtered distribution of a level, its own dates taken in. */
function filteredAt(problem: LatticeProblem, pass: BiasNode['pass'], level: number): Row {
  const k = Math.floor((level - problem.first) / segmentLength)
  const { from } = segmentLevels(problem, k)
  const row = filteredRows(problem, pass, k, new RowArena())[level - from]
  const here = problem.datesAt.get(level)
  return here ? afterDates(problem, row, here).row : row
}

/** Above the first date of a floating count no year is preferred: ones, as far as they can lead into the row below. */
function flatStart(laws: StepLaws, below: Row, from: number, to: number): Row {
  const years = laws.mean[to] - laws.mean[from]
  const spread = Math.ceil(8 * Math.sqrt(laws.variance[to] - laws.variance[from])) + 3
  const low = Math.floor(below.low - years - spread)
  const end = Math.ceil(below.low + below.width - years + spread)
  const row = emptyRow(low, end - low)
  row.values.fill(1, row.at, row.at + row.width)
  return row
}
