/**
 * Which marks of several counters mean the same boundary: an order-preserving assignment of all counts at once.
 *
 * Marks that may be one boundary lie within the tolerance, a fraction of the local layer thickness. Each site takes at
 * most one mark of each counter, and no two sites cross. Of all such assignments the cheapest is taken, by exact dynamic
 * programming. A site marked by r of k counters costs
 *   1 + 1.5 min(r, k - r) + 8 sum (x - mean)^2 / tolerance^2:
 * one for itself, so that near marks are joined; so much for each counter who missed it or, where fewer marked it than
 * not, who marked it wrongly, so that a false mark does not tear the others' boundary apart; and the scatter of its marks.
 * With two counts this is the classical alignment of two sequences (Needleman & Wunsch 1970), which joins two marks as
 * long as they lie within the tolerance. The figures are log-likelihoods in units of 2.5: one mark in forty missed or
 * false, pointing scattered by 0.16 tolerances.
 */
import { checkPositive, checkInteger, Fault } from '../check.ts'
import { checkCounterMarks, type CounterMarks } from './counterMarks.ts'

/** Labels of a site by a counter; `unseen`: the counter did not look there. */
export const siteLabels = ['absent', 'doubtful', 'certain', 'unseen'] as const
export type SiteLabel = (typeof siteLabels)[number]
export const absent = 0
export const doubtful = 1
export const certain = 2
export const unseen = 3

export interface AlignmentOptions {
  /** Largest extent of the marks of one boundary, as a fraction of the local layer thickness. */
  tolerance: number
  /** Layers on each side (of each counter) whose median spacing is the local thickness. */
  thicknessWindow: number
}

/**
 * 0.4: two counters' pointing differs by well under a tenth of a layer, while a false boundary in the middle of a layer
 * lies half a layer away from either true one.
 */
export const defaultAlignment: AlignmentOptions = { tolerance: 0.4, thicknessWindow: 8 }

/** Sites, sorted downcore; `counters` in the order they came in. */
export interface Alignment {
  counters: string[]
  /** Mean position of the marks of the site, strictly increasing, [sites]. */
  position: Float64Array
  /** Local layer thickness, in the unit of position, [sites]. */
  thickness: Float64Array
  /** Index into siteLabels, [sites x counters], row-major. */
  label: Uint8Array
  /** Which mark of the counter it is, -1 for none, [sites x counters], row-major. */
  mark: Int32Array
}

/** All marks of all counters in one row, sorted downcore. `rank` is the counter's canonical place, columns [marks]. */
interface Pool {
  position: Float64Array
  rank: Uint8Array
  index: Int32Array
  thickness: Float64Array
  /** Tolerance at the mark, in the unit of position. */
  reach: Float64Array
  /** How many counters looked at the place. */
  watching: Uint8Array
}

const siteCost = 1
const odditiesCost = 1.5
const scatterCost = 8

const mostCounters = 12
/** A knot of marks with more states than this is cut at its widest gaps; it takes some seven layers in a chain of near ties. */
const mostStates = 50_000

/** Aligns the counts; the result does not depend on the order in which the counters are given. */
export function alignCounts(counts: readonly CounterMarks[], options: AlignmentOptions = defaultAlignment): Alignment {
  checkPositive('tolerance', options.tolerance)
  checkInteger('thicknessWindow', options.thicknessWindow, 1)
  checkInteger('number of counts', counts.length, 1, mostCounters)
  counts.forEach(checkCounterMarks)
  // Counters are worked in an order that their marks alone decide, so that ties fall the same way however they are listed.
  const order = counts.map((_, k) => k).sort((a, b) => compareCounts(counts[a], counts[b]))
  const pool = poolMarks(
    order.map((k) => counts[k]),
    options,
  )
  const sites: number[][] = []
  for (const [from, to] of knotsOf(pool)) sites.push(...solveKnot(pool, from, to, counts.length))
  return tabulate(counts, order, pool, sites)
}

function compareCounts(a: CounterMarks, b: CounterMarks): number {
  if (a.position.length !== b.position.length) return a.position.length - b.position.length
  for (let i = 0; i < a.position.length; i++) {
    const step = a.position[i] - b.position[i] || a.doubtful[i] - b.doubtful[i]
    if (step !== 0) return step
  }
  return 0
}

function poolMarks(counts: readonly CounterMarks[], options: AlignmentOptions): Pool {
  const entries = counts.flatMap((count, rank) =>
    Array.from(count.position, (position, index) => ({ position, rank, index })),
  )
  entries.sort((a, b) => a.position - b.position || a.rank - b.rank)
  const position = Float64Array.from(entries, (entry) => entry.position)
  const thickness = localThickness(counts, position, options.thicknessWindow)
  return {
    position,
    rank: Uint8Array.from(entries, (entry) => entry.rank),
    index: Int32Array.from(entries, (entry) => entry.index),
    thickness,
    reach: thickness.map((value) => options.tolerance * value),
    watching: Uint8Array.from(position, (x) => counts.filter(({ range }) => isSeen(range, x)).length),
  }
}

const isSeen = (range: CounterMarks['range'], x: number) => range === null || (x >= range.from && x <= range.to)

/** Median spacing of the marks of all counters around each of the sorted positions: `window` layers of each counter on both sides. */
export function localThickness(counts: readonly CounterMarks[], at: Float64Array, window: number): Float64Array {
  const spacings = counts.flatMap(({ position }) =>
    Array.from(position.subarray(1), (end, i) => ({ middle: (end + position[i]) / 2, spacing: end - position[i] })),
  )
  if (spacings.length === 0) {
    throw new Fault(
      'argument',
      'counts',
      counts.length,
      'at least one count must hold two boundaries, or there is no thickness to measure the tolerance by',
    )
  }
  spacings.sort((a, b) => a.middle - b.middle || a.spacing - b.spacing)
  const half = window * counts.length
  const inside: number[] = []
  const result = new Float64Array(at.length)
  let first = 0
  let end = 0
  let centre = 0
  for (let i = 0; i < at.length; i++) {
    while (centre < spacings.length && spacings[centre].middle < at[i]) centre++
    for (; end < Math.min(spacings.length, centre + half); end++) insertSorted(inside, spacings[end].spacing)
    for (; first < Math.min(centre - half, spacings.length - 2 * half); first++)
      removeSorted(inside, spacings[first].spacing)
    const middle = inside.length >> 1
    result[i] = inside.length % 2 === 1 ? inside[middle] : (inside[middle - 1] + inside[middle]) / 2
  }
  return result
}

/** First place in a sorted list whose value is not below `value`. */
function placeOf(sorted: readonly number[], value: number): number {
  let low = 0
  let high = sorted.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (sorted[middle] < value) low = middle + 1
    else high = middle
  }
  return low
}

const insertSorted = (sorted: number[], value: number) => void sorted.splice(placeOf(sorted, value), 0, value)
const removeSorted = (sorted: number[], value: number) => void sorted.splice(placeOf(sorted, value), 1)

/**
 * Cuts the pool where no site can reach across: a site ends within the tolerance of its youngest mark. What lies between
 * two cuts, a knot, can be solved by itself; one with too many states is cut again at its widest gap.
 */
function knotsOf(pool: Pool): [number, number][] {
  const knots: [number, number][] = []
  let from = 0
  let reach = -Infinity
  for (let i = 0; i < pool.position.length; i++) {
    if (pool.position[i] > reach && i > from) {
      cutKnot(pool, from, i, knots)
      from = i
    }
    reach = Math.max(reach, pool.position[i] + pool.reach[i])
  }
  cutKnot(pool, from, pool.position.length, knots)
  return knots
}

function cutKnot(pool: Pool, from: number, to: number, knots: [number, number][]): void {
  const todo: [number, number][] = [[from, to]]
  for (let next = todo.pop(); next; next = todo.pop()) {
    const [start, end] = next
    if (statesOf(pool, start, end) <= mostStates) {
      knots.push(next)
      continue
    }
    let cut = start + 1
    for (let i = start + 1; i < end; i++) {
      if (pool.position[i] - pool.position[i - 1] > pool.position[cut] - pool.position[cut - 1]) cut = i
    }
    todo.push([cut, end], [start, cut])
  }
}

/** Product over the counters of (their marks in the knot + 1). */
function statesOf(pool: Pool, from: number, to: number): number {
  const marks = new Uint32Array(mostCounters)
  for (let i = from; i < to; i++) marks[pool.rank[i]]++
  return marks.reduce((states, n) => states * (n + 1), 1)
}

/** The cheapest sites of one knot, young to old; each a list of places in the pool. */
function solveKnot(pool: Pool, from: number, to: number, counters: number): number[][] {
  const places: number[][] = Array.from({ length: counters }, () => [])
  for (let i = from; i < to; i++) places[pool.rank[i]].push(i)
  const here = places.filter((marks) => marks.length > 0)
  return isOneSite(pool, from, to, here.length) ? [here.flat()] : cheapestPath(pool, here)
}

/**
 * One mark of each counter at most, close together: to split the site would cost one more site and, as min(r, k - r) is
 * concave, no fewer oddities; so it stays whole as long as its scatter costs less than a site.
 */
function isOneSite(pool: Pool, from: number, to: number, counters: number): boolean {
  const reach = pool.reach[from]
  if (counters < to - from || pool.position[to - 1] - pool.position[from] > reach) return false
  let sum = 0
  let squares = 0
  for (let i = from; i < to; i++) {
    const distance = pool.position[i] - pool.position[from]
    sum += distance
    squares += distance * distance
  }
  return scatterCost * (squares - (sum * sum) / (to - from)) <= siteCost * reach * reach
}

/**
 * Shortest path over the states "so many marks of each counter are placed": a state is a mixed-radix number, each step
 * places the next mark of some of the counters as one site. Steps raise the number, so one sweep upward is enough.
 */
function cheapestPath(pool: Pool, here: readonly number[][]): number[][] {
  const stride: number[] = []
  let states = 1
  for (const marks of here) {
    stride.push(states)
    states *= marks.length + 1
  }
  const cost = new Float64Array(states).fill(Infinity)
  const step = new Uint16Array(states)
  cost[0] = 0
  for (let state = 0; state < states - 1; state++) {
    if (cost[state] === Infinity) continue
    const front = frontOf(pool, here, stride, state)
    const start = cost[state]
    eachNextSite(front, (price, subset, jump) => {
      if (start + price < cost[state + jump]) {
        cost[state + jump] = start + price
        step[state + jump] = subset
      }
    })
  }
  return walkBack(here, stride, step, states - 1)
}

/** The next mark of each counter that has one left, youngest first. */
interface Front {
  position: number[]
  reach: number[]
  watching: number[]
  /** The mark after it, Infinity for none. */
  following: number[]
  /** The counter as a bit, and what placing its mark adds to the state. */
  bit: number[]
  jump: number[]
}

function frontOf(pool: Pool, here: readonly number[][], stride: readonly number[], state: number): Front {
  const front: Front = { position: [], reach: [], watching: [], following: [], bit: [], jump: [] }
  for (let k = 0; k < here.length; k++) {
    const marks = here[k]
    const placed = Math.floor(state / stride[k]) % (marks.length + 1)
    if (placed === marks.length) continue
    const x = pool.position[marks[placed]]
    let at = front.position.length
    while (at > 0 && front.position[at - 1] > x) at--
    front.position.splice(at, 0, x)
    front.reach.splice(at, 0, pool.reach[marks[placed]])
    front.watching.splice(at, 0, pool.watching[marks[placed]])
    front.following.splice(at, 0, placed + 1 < marks.length ? pool.position[marks[placed + 1]] : Infinity)
    front.bit.splice(at, 0, 1 << k)
    front.jump.splice(at, 0, stride[k])
  }
  return front
}

/**
 * Which sites may come next, with their costs. Sites are laid down in the order of their youngest marks, so the next one
 * holds the youngest mark left; only where that mark's own site must wait, because it takes some counter's second next
 * mark, may one that holds the first of the two come before it.
 */
function eachNextSite(front: Front, visit: (cost: number, subset: number, jump: number) => void): void {
  const { position, reach, watching, following, bit, jump } = front
  const limit = position[0] + reach[0]
  let blocking = 0
  for (let k = 1; k < position.length; k++) if (following[k] <= limit) blocking |= bit[k]

  /** Adds marks from place k on to a site whose youngest mark is at `from`; sums are of distances from it. */
  function grow(
    k: number,
    from: number,
    count: number,
    sum: number,
    squares: number,
    subset: number,
    step: number,
  ): void {
    if (from === 0 || (subset & blocking) !== 0) {
      const scatter = Math.max(0, squares - (sum * sum) / count) / (reach[from] * reach[from])
      const oddities = Math.min(count, Math.abs(watching[from] - count))
      visit(siteCost + odditiesCost * oddities + scatterCost * scatter, subset, step)
    }
    for (let next = k; next < position.length; next++) {
      const distance = position[next] - position[from]
      if (distance > reach[from]) break
      grow(
        next + 1,
        from,
        count + 1,
        sum + distance,
        squares + distance * distance,
        subset | bit[next],
        step + jump[next],
      )
    }
  }
  const last = blocking === 0 ? 1 : position.length
  for (let from = 0; from < last; from++) grow(from + 1, from, 1, 0, 0, bit[from], jump[from])
}

function walkBack(here: readonly number[][], stride: readonly number[], step: Uint16Array, last: number): number[][] {
  const sites: number[][] = []
  for (let state = last; state > 0;) {
    const subset = step[state]
    const site: number[] = []
    let jump = 0
    for (let k = 0; k < here.length; k++) {
      if (((subset >> k) & 1) === 0) continue
      site.push(here[k][(Math.floor(state / stride[k]) % (here[k].length + 1)) - 1])
      jump += stride[k]
    }
    sites.push(site)
    state -= jump
  }
  return sites.reverse()
}

/** Sites as columns, counters back in the order they came in. */
function tabulate(
  counts: readonly CounterMarks[],
  order: readonly number[],
  pool: Pool,
  sites: readonly number[][],
): Alignment {
  const width = counts.length
  const position = new Float64Array(sites.length)
  const thickness = new Float64Array(sites.length)
  const mark = new Int32Array(sites.length * width).fill(-1)
  const label = new Uint8Array(sites.length * width)
  let last = -Infinity
  for (const [s, places] of sites.entries()) {
    for (const place of places) {
      position[s] += pool.position[place] / places.length
      thickness[s] += pool.thickness[place] / places.length
      const counter = order[pool.rank[place]]
      mark[s * width + counter] = pool.index[place]
      label[s * width + counter] = counts[counter].doubtful[pool.index[place]] ? doubtful : certain
    }
    // Two neighbouring sites may keep the order of their marks and yet have means in the other order; depths must rise.
    if (!(position[s] > last)) position[s] = last + 1e-9 * thickness[s]
    last = position[s]
    counts.forEach(({ range }, k) => {
      if (!isSeen(range, position[s]) && mark[s * width + k] < 0) label[s * width + k] = unseen
    })
  }
  return { counters: counts.map(({ name }) => name), position, thickness, label, mark }
}
