/**
 * Exact ages. Between neighbouring levels of the core passes a small whole number of years, with a distribution from the
 * count; so the calendar year down the core is a Markov chain on whole numbers, and forward-backward over (level, year)
 * (Rabiner 1989, Proc. IEEE 77, 257) gives the exact posterior of every level given all dates. The bias shared by the whole
 * count is integrated over its nodes, each with its own chain, weighted by prior times evidence: so it is learned.
 * With exact counts and no bias this is the wiggle match of Bronk Ramsey, van der Plicht & Weninger (2001).
 */
import type { Work } from '../work.ts'
import { biasNodes } from './biasNodes.ts'
import type { BiasNode } from './biasNodes.ts'
import { checkDates } from './dateChecks.ts'
import type { DateCheck } from './dateChecks.ts'
import type { CountChain } from './countChain.ts'
import type { DateLikelihood } from './dates.ts'
import { backwardPass, nodeWeights } from './latticeBackward.ts'
import { latticeDefaults, latticeProblem } from './latticeProblem.ts'
import type { LatticeOptions, LatticeProblem } from './latticeProblem.ts'
import { AgeColumns } from './levelAges.ts'
import type { LevelAges } from './levelAges.ts'

export { latticeDefaults } from './latticeProblem.ts'
export type { LatticeOptions } from './latticeProblem.ts'
export { rangesAt } from './levelAges.ts'
export type { LevelAges, YearRanges } from './levelAges.ts'
export type { DateCheck } from './dateChecks.ts'

/** What is known of the bias of the count: columns [nodes]. */
export interface BiasPosterior {
  /** True years per counted year. */
  factor: Float64Array
  /** Posterior probability. */
  weight: Float64Array
  mean: number
  sd: number
  /** Evidence of the dates with the bias, over their evidence if the count had none. */
  bayesFactor: number
}

/** The chronology of a core tied to the calendar. */
export interface DatedChronology {
  /** Of each row of the counted layers, [rows]. */
  ages: LevelAges
  /** In the order in which the dates were given. */
  checks: DateCheck[]
  bias: BiasPosterior
  logEvidence: number
}

/** The posterior of every row of the counted layers, and what each date has to say. */
export function* calendarAges(
  chain: CountChain,
  dates: readonly DateLikelihood[],
  options: LatticeOptions = latticeDefaults,
): Work<DatedChronology> {
  const problem = latticeProblem(chain, dates, options)
  const nodes = yield* biasNodes(problem)
  const columns = new AgeColumns(chain.levels)
  const atDates = new Map<number, { low: number; probability: Float64Array }>()
  const cavities = yield* backwardPass(problem, nodes, (level, low, probability) => {
    columns.add(level, low, probability)
    if (problem.datesAt.has(level)) atDates.set(level, { low, probability: probability.slice() })
  })
  const checks = checkDates(problem.dates, cavities, atDates)
  return {
    ages: columns.of(chain.levelOfRow),
    checks: dates.map((date) => checks[problem.dates.indexOf(date)]),
    bias: biasPosterior(nodes, problem),
    logEvidence: logEvidence(nodes, problem),
  }
}

/** Log of the evidence integrated over the bias: the trapezium of prior density times evidence over z. */
function logEvidence(nodes: readonly BiasNode[], { options }: LatticeProblem): number {
  const most = nodes.reduce((a, { logWeight }) => Math.max(a, logWeight), -Infinity)
  if (options.biasSd === 0) return most
  // With fewer nodes than make an interval, the prior is that one node.
  if (nodes.length < 2) return nodes[0].logWeight - nodes[0].logPrior
  let sum = 0
  for (let k = 0; k + 1 < nodes.length; k++) {
    const width = nodes[k + 1].z - nodes[k].z
    sum += (width / 2) * (Math.exp(nodes[k].logWeight - most) + Math.exp(nodes[k + 1].logWeight - most))
  }
  return most + Math.log(sum)
}

function biasPosterior(nodes: readonly BiasNode[], problem: LatticeProblem): BiasPosterior {
  const weights = nodeWeights(nodes)
  const mean = nodes.reduce((sum, { factor }, k) => sum + factor * weights[k], 0)
  const variance = nodes.reduce((sum, { factor }, k) => sum + (factor - mean) ** 2 * weights[k], 0)
  const none = nodes.find(({ z }) => z === 0)
  return {
    factor: Float64Array.from(nodes, ({ factor }) => factor),
    weight: Float64Array.from(weights),
    mean,
    sd: Math.sqrt(variance),
    bayesFactor: none ? Math.exp(logEvidence(nodes, problem) - (none.logWeight - none.logPrior)) : Infinity,
  }
}
