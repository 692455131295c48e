import type { Work } from '../work.ts'
import type { BiasNode } from './biasNodes.ts'
import type { LatticeProblem } from './latticeProblem.ts'
import { afterDates, bandAbove, bandsOf, filteredRows, segmentLevels, segments, stepUp } from './latticeSegment.ts'
import { emptyRow, keptRow, RowArena, sumOf } from './rowArena.ts'
import type { Row } from './rowArena.ts'

/** The posterior of one level: `probability` over x = low ..., sums to 1; valid during the call only. */
export type OnLevel = (level: number, low: number, probability: Float64Array) => void

/** What the count and all other dates say of the year of a date's level; sums to 1; empty where they say nothing. */
export interface Cavity {
  low: number
  probability: Float64Array
}

/** One node's share of a cavity: density over x = low ..., and the log of its evidence with the prior of the bias. */
interface CavityPart {
  low: number
  values: Float64Array
  logWeight: number
}

/** One node on its way up. */
interface Climb {
  node: BiasNode
  /** Posterior weight; the weights of all nodes sum to 1. */
  weight: number
  /** Likelihood of everything at and below the level last done; true values are those times exp(logScale). */
  below: Row
  logScale: number
}

/** Nodes with a smaller weight add nothing that shows. */
const leastWeight = 1e-11

/**
 * The way up (smoothing), all nodes side by side from base to top: reports each level's posterior, and returns for every
 * date the leave-one-out distribution of its level. Memory: three segments of rows, and one row of every node.
 */
export function* backwardPass(problem: LatticeProblem, nodes: readonly BiasNode[], onLevel: OnLevel): Work<Cavity[]> {
  const { chain, dates, first } = problem
  const climbs = startClimbs(nodes, chain.levels)
  const parts: CavityPart[][] = dates.map(() => [])
  const arenas = { filtered: new RowArena(), below: new RowArena(), sums: new RowArena() }
  for (let k = segments(problem) - 1; k >= 0; k--) {
    const { from, to } = segmentLevels(problem, k)
    const sums = arenas.sums.rows(unionBands(climbs, from, to))
    for (const climb of climbs) {
      const filtered = filteredRows(problem, climb.node.pass, k, arenas.filtered)
      const below = arenas.below.rows(bandsOf(climb.node.pass, from, to))
      climbSegment(problem, climb, { from, filtered, below, sums }, parts)
    }
    for (let j = to - from - 1; j >= 0; j--) report(from + j, sums[j], onLevel)
    yield { stage: 'ages', done: chain.levels - from, total: chain.levels }
  }
  for (let level = first - 1; level >= 0; level--) {
    report(level, stepAll(problem, climbs, level), onLevel)
    if (level % 512 === 0) yield { stage: 'ages', done: chain.levels - level, total: chain.levels }
  }
  return parts.map(mixed)
}

function startClimbs(nodes: readonly BiasNode[], levels: number): Climb[] {
  const weights = nodeWeights(nodes)
  const climbs = nodes.map((node, k) => ({ node, weight: weights[k], below: emptyRow(0, 0), logScale: 0 }))
  // A node whose band was cut to nothing on the way down matters to no distribution.
  return climbs.filter(({ node }) => node.pass.width[levels - 1] > 0)
}

/** Posterior weights of the nodes, in their order; they sum to 1. */
export function nodeWeights(nodes: readonly BiasNode[]): number[] {
  const most = nodes.reduce((a, { logWeight }) => Math.max(a, logWeight), -Infinity)
  const weights = nodes.map(({ logWeight }) => Math.exp(logWeight - most))
  const total = weights.reduce((a, b) => a + b, 0)
  return weights.map((one) => one / total)
}

/** Bands wide enough for every node, by level. */
function unionBands(climbs: readonly Climb[], from: number, to: number): { low: number; width: number }[] {
  const bands = []
  for (let i = from; i < to; i++) {
    let low = Infinity
    let end = -Infinity
    for (const { node, weight } of climbs) {
      if (weight < leastWeight) continue
      low = Math.min(low, node.pass.low[i])
      end = Math.max(end, node.pass.low[i] + node.pass.width[i])
    }
    bands.push({ low, width: end - low })
  }
  return bands
}

/** The rows of one segment while one node passes it. */
interface SegmentRows {
  from: number
  filtered: Row[]
  below: Row[]
  sums: Row[]
}

function climbSegment(problem: LatticeProblem, climb: Climb, rows: SegmentRows, parts: CavityPart[][]): void {
  const { from, filtered, sums } = rows
  for (let i = from + filtered.length - 1; i >= from; i--) {
    const below = rows.below[i - from]
    if (i >= problem.last) below.values.fill(1, below.at, below.at + below.width)
    else stepUp(climb.below, below, climb.node.pass.laws, i + 1)
    climb.below = below
    const here = problem.datesAt.get(i)
    if (here) meetDates(problem, climb, filtered[i - from], { level: i, here }, parts)
    if (climb.weight >= leastWeight) addProduct(sums[i - from], filtered[i - from], climb.below, climb.weight)
  }
  climb.below = keptRow(climb.below)
}

/** Adds filtered x below, scaled to the node's weight. */
function addProduct(sum: Row, filtered: Row, below: Row, weight: number): void {
  const a = filtered.values
  const b = below.values
  const shift = below.at - filtered.at
  const end = filtered.at + filtered.width
  let total = 0
  for (let k = filtered.at; k < end; k++) total += a[k] * b[k + shift]
  if (!(total > 0)) return
  const scale = weight / total
  const target = sum.values
  const offset = sum.at + filtered.low - sum.low - filtered.at
  for (let k = filtered.at; k < end; k++) target[k + offset] += scale * a[k] * b[k + shift]
}

/** Takes the dates of a level into the likelihood from below, and leaves each of them out once. */
function meetDates(
  problem: LatticeProblem,
  climb: Climb,
  filtered: Row,
  { level, here }: { level: number; here: readonly number[] },
  parts: CavityPart[][],
): void {
  const { node, below } = climb
  const logBefore = node.pass.logBefore.get(level) ?? -Infinity
  const before = sumOf(filtered)
  for (const d of here) {
    // A lone date of a floating count has nothing to be left out for.
    if (problem.dates[d].fixed || problem.dates.length === 1) continue
    const others = here.filter((other) => other !== d)
    const product = keptRow(below)
    for (let k = 0; k < below.width; k++) product.values[product.at + k] *= filtered.values[filtered.at + k] / before
    const { row, logSum } = afterDates(problem, product, others)
    const logWeight = node.logPrior + logBefore + climb.logScale + logSum
    const values = row.values.slice(row.at, row.at + row.width)
    if (logWeight > -Infinity) parts[d].push({ low: below.low, values, logWeight })
  }
  const met = afterDates(problem, below, here)
  climb.below = met.row
  climb.logScale += met.logSum
}

/** One level further up, above the first date: nothing comes from above, so the way up is all there is. */
function stepAll(problem: LatticeProblem, climbs: readonly Climb[], level: number): Row {
  const { chain, options } = problem
  let low = Infinity
  let end = -Infinity
  for (const climb of climbs) {
    if (climb.weight < leastWeight) continue
    const { laws } = climb.node.pass
    const band = bandAbove(climb.below, laws, level + 1)
    const above = emptyRow(band.low, band.width)
    stepUp(climb.below, above, laws, level + 1)
    climb.below = trimmedRow(above, options.cut / (2 * chain.levels))
    low = Math.min(low, climb.below.low)
    end = Math.max(end, climb.below.low + climb.below.width)
  }
  const sum = emptyRow(low, end - low)
  for (const { below, weight } of climbs) {
    if (weight < leastWeight) continue
    const scale = weight / sumOf(below)
    const offset = sum.at + below.low - low - below.at
    for (let k = below.at; k < below.at + below.width; k++) sum.values[k + offset] += scale * below.values[k]
  }
  return sum
}

/** Cuts the ends that hold less than a share of the row each. */
function trimmedRow(row: Row, share: number): Row {
  const { values, at, width } = row
  const least = share * sumOf(row)
  let first = at
  let end = at + width
  for (let cut = values[first]; cut <= least && first < end - 1; cut += values[first]) first++
  for (let cut = values[end - 1]; cut <= least && end > first + 1; cut += values[end - 1]) end--
  if (first === at && end === at + width) return row
  return keptRow({ values, at: first, low: row.low + first - at, width: end - first })
}

function report(level: number, row: Row, onLevel: OnLevel): void {
  const probability = row.values.subarray(row.at, row.at + row.width)
  const sum = sumOf(row)
  for (let k = 0; k < probability.length; k++) probability[k] /= sum
  onLevel(level, row.low, probability)
}

/** The mixture of the nodes' shares by their evidence. */
function mixed(parts: readonly CavityPart[]): Cavity {
  if (parts.length === 0) return { low: 0, probability: new Float64Array(0) }
  const low = parts.reduce((a, part) => Math.min(a, part.low), Infinity)
  const end = parts.reduce((a, part) => Math.max(a, part.low + part.values.length), -Infinity)
  const most = parts.reduce((a, part) => Math.max(a, part.logWeight), -Infinity)
  const probability = new Float64Array(end - low)
  let total = 0
  for (const part of parts) {
    const weight = Math.exp(part.logWeight - most)
    total += weight
    for (let k = 0; k < part.values.length; k++) probability[part.low - low + k] += weight * part.values[k]
  }
  return { low, probability: probability.map((one) => one / total) }
}
