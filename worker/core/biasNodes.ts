import { Fault } from '../check.ts'
import type { Work } from '../work.ts'
import { forwardPass } from './latticeForward.ts'
import type { ForwardPass } from './latticeForward.ts'
import type { LatticeProblem } from './latticeProblem.ts'
import { stepLaws } from './stepLaws.ts'

/** One value of the bias shared by the whole count. */
export interface BiasNode {
  /** Bias in prior standard deviations; the factor is exp(biasSd z). */
  z: number
  factor: number
  /** Log of the prior density at z. */
  logPrior: number
  pass: ForwardPass
  /** Log of prior density at z times evidence; the posterior weights are their exponentials, normalised. */
  logWeight: number
  /** The same without one date or another: see ForwardPass.logWithoutOne. */
  logWithoutOne: number
}

/** A fixed grid reaches this far, in prior SD; beyond it lies 6e-5 of the prior. */
const fixedReach = 4
/** The adaptive grid: 2^-m times 0.75 SD apart, out to 6 SD. */
const coarsest = 0.75
const adaptiveReach = 6
const mostHalvings = 5
/**
 * Neighbouring nodes may move a level by this many of its own standard deviations at given bias. A sum of normals two SD
 * apart differs from the integral by 2 exp(-2 pi^2 / 4) = 1.4 % of its density at the very most (Poisson summation).
 */
const mostShift = 2
/** A shift of one year between nodes leaves no gap, however sharp the level is. */
const leastSd = 0.5
/** Nodes whose weight is this far below the largest do not call for finer neighbours. */
const negligible = Math.log(1e-6)
const negligibleWithoutOne = Math.log(1e-4)
/** The posterior of the bias is at least this wide, in prior SD: for a first lower bound of the evidence. */
const narrowest = 0.02

/** Log of the standard normal density. */
const logNormal = (z: number) => -0.5 * (z * z + Math.log(2 * Math.PI))

/** Runs the way down for the nodes of the bias that matter, and returns them sorted by z. */
export function* biasNodes(problem: LatticeProblem): Work<BiasNode[]> {
  const search = new NodeSearch(problem)
  if (problem.options.biasSd === 0) yield* search.run([0])
  else if (problem.options.biasNodes !== null) yield* search.run(fixedGrid(problem.options.biasNodes))
  else yield* search.refine()
  return search.result()
}

function fixedGrid(nodes: number): number[] {
  if (nodes === 1) return [0]
  return Array.from({ length: nodes }, (_, k) => fixedReach * ((2 * k) / (nodes - 1) - 1))
}

class NodeSearch {
  /** By z in units of the finest spacing. */
  private readonly nodes = new Map<number, BiasNode>()
  private readonly problem: LatticeProblem
  /** Log of a lower bound of the evidence integrated over the bias. */
  private logLeast = -Infinity
  private begun = false

  constructor(problem: LatticeProblem) {
    this.problem = problem
  }

  *run(grid: readonly number[]): Work<void> {
    for (const z of fromTheMiddle(grid)) yield* this.add(z)
  }

  *refine(): Work<void> {
    let spacing = coarsest
    const reach = Math.round(adaptiveReach / coarsest)
    yield* this.run(Array.from({ length: 2 * reach + 1 }, (_, k) => (k - reach) * coarsest))
    for (let halving = 0; halving < mostHalvings; halving++) {
      const between = this.wanted(spacing)
      if (between.length === 0) return
      yield* this.run(between)
      spacing /= 2
    }
  }

  /** Nodes sorted by z, without those that no distribution needs. */
  result(): BiasNode[] {
    const all = [...this.nodes.values()].sort((a, b) => a.z - b.z)
    const alive = all.filter((node) => node.logWeight > -Infinity || node.logWithoutOne > -Infinity)
    if (!alive.some((node) => node.logWeight > -Infinity)) this.noChronology()
    if (this.problem.options.biasNodes !== null) return alive
    const [most, mostWithoutOne] = this.largest()
    return alive.filter((node) => matters(node, most, mostWithoutOne))
  }

  private *add(z: number): Work<void> {
    const { biasSd, cut } = this.problem.options
    const { levels } = this.problem.chain
    const laws = stepLaws(this.problem.chain, Math.exp(biasSd * z))
    if (!this.begun) {
      this.begun = true
      const rough = yield* forwardPass(this.problem, laws, { logLeast: 0, beam: 1e-12 })
      this.learn(z, rough)
    }
    // The loss at this bias, times its prior density, over the width of the grid, is to stay below cut x evidence.
    const density = biasSd === 0 ? 0 : logNormal(z) + Math.log(2 * adaptiveReach)
    const logLeast = Math.log(cut / (2 * levels)) + this.logLeast - density
    const pass = yield* forwardPass(this.problem, laws, { logLeast, beam: 0 })
    this.learn(z, pass)
    const prior = biasSd === 0 ? 0 : logNormal(z)
    this.nodes.set(z, {
      z,
      factor: Math.exp(biasSd * z),
      logPrior: prior,
      pass,
      logWeight: prior + pass.logEvidence,
      logWithoutOne: prior + pass.logWithoutOne,
    })
    yield { stage: 'bias', done: this.nodes.size, total: this.nodes.size + 1 }
  }

  private learn(z: number, pass: ForwardPass): void {
    const width = this.problem.options.biasSd === 0 ? 0 : logNormal(z) + Math.log(narrowest)
    this.logLeast = Math.max(this.logLeast, pass.logEvidence + width)
  }

  private largest(): [number, number] {
    let most = -Infinity
    let mostWithoutOne = -Infinity
    for (const node of this.nodes.values()) {
      most = Math.max(most, node.logWeight)
      mostWithoutOne = Math.max(mostWithoutOne, node.logWithoutOne)
    }
    return [most, mostWithoutOne]
  }

  /** Midpoints between neighbours of the present spacing that lie too far apart. */
  private wanted(spacing: number): number[] {
    const [most, mostWithoutOne] = this.largest()
    const between: number[] = []
    for (const node of this.nodes.values()) {
      const next = this.nodes.get(node.z + spacing)
      if (!next) continue
      if (!matters(node, most, mostWithoutOne) && !matters(next, most, mostWithoutOne)) continue
      if (tooFarApart(this.problem, node, next)) between.push(node.z + spacing / 2)
    }
    return between
  }

  private noChronology(): never {
    const { dates, options } = this.problem
    const names = dates.map(({ id }) => id).join(', ')
    const exact = options.biasSd === 0 ? ' without a bias' : ''
    const message = `no chronology${exact} fits the count and its dates together (${names}); check their years and depths, or allow the dates an error`
    throw new Fault('conflict', 'dates', names, message)
  }
}

const matters = (node: BiasNode, most: number, mostWithoutOne: number): boolean =>
  node.logWeight > most + negligible || node.logWithoutOne > mostWithoutOne + negligibleWithoutOne

function tooFarApart({ first, last }: LatticeProblem, a: BiasNode, b: BiasNode): boolean {
  const sdOf = (x: number, y: number) => Math.max(leastSd, Math.min(x, y))
  for (const [w, here] of a.pass.watched.entries()) {
    const there = b.pass.watched.at(w)
    // A node that died on the way has no levels further down; what it shares with its neighbour is enough.
    if (!there) break
    if (Math.abs(here.mean - there.mean) > mostShift * sdOf(here.sd, there.sd)) return true
  }
  // Above the first date of a floating count the years run away from it upwards.
  const shift = Math.abs(a.pass.laws.mean[first] - b.pass.laws.mean[first])
  const variance = Math.min(a.pass.laws.variance[first], b.pass.laws.variance[first])
  // With no other dated level, the spread of the first one's date lies over all others too.
  const own = first === last ? Math.min(a.pass.startSd, b.pass.startSd) : 0
  return shift > mostShift * Math.max(leastSd, Math.hypot(Math.sqrt(variance), own))
}

/** The most probable nodes first: what they show of the evidence narrows the bands of the others. */
function fromTheMiddle(grid: readonly number[]): number[] {
  return grid.toSorted((a, b) => Math.abs(a) - Math.abs(b) || a - b)
}
