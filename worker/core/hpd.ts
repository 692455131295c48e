/** A run of neighbouring cells, both ends included, and the probability it holds. */
export interface HpdRange {
  from: number
  to: number
  probability: number
}

/** The two levels in which ages are reported: these figures, not the 0.6827 and 0.9545 of one and two sigma. */
export const hpdLevels = [0.683, 0.954] as const

/** Sums of a few thousand cells differ from the level they should reach by rounding only. */
const rounding = 1e-12
/** Cells are first sorted roughly, into so many classes of equal width between 0 and the largest. */
const classes = 256
const classSums = new Float64Array(classes)

/**
 * Highest-posterior-density ranges of a distribution over whole years: cells are taken in the order of their probability
 * until their sum first reaches the level; neighbouring cells are reported as one run. `probability` [cells] must sum to 1;
 * its first cell belongs to `first`. Ties are settled from the first cell on.
 */
export function hpdRanges(probability: Float64Array, first: number, level: number): HpdRange[] {
  const last = lastTaken(probability, level)
  const ranges: HpdRange[] = []
  let from = -1
  let sum = 0
  for (let i = 0; i <= probability.length; i++) {
    const value = i < probability.length ? probability[i] : -1
    if (value > last.value || (value === last.value && i <= last.index)) {
      if (from < 0) from = i
      sum += value
    } else if (from >= 0) {
      ranges.push({ from: first + from, to: first + i - 1, probability: sum })
      from = -1
      sum = 0
    }
  }
  return ranges
}

/** The last cell that is taken. Whole classes are summed from the top; only the class that reaches the level is sorted. */
function lastTaken(p: Float64Array, level: number): { value: number; index: number } {
  let most = 0
  for (let i = 0; i < p.length; i++) if (p[i] > most) most = p[i]
  const scale = (classes * (1 - 1e-12)) / most
  classSums.fill(0)
  for (let i = 0; i < p.length; i++) classSums[(p[i] * scale) | 0] += p[i]
  let reached = classes - 1
  let sum = 0
  while (reached > 0 && sum + classSums[reached] < level - rounding) sum += classSums[reached--]
  const cells: number[] = []
  for (let i = 0; i < p.length; i++) if (((p[i] * scale) | 0) === reached) cells.push(i)
  cells.sort((a, b) => p[b] - p[a] || a - b)
  let next = 0
  while (next < cells.length - 1 && (sum += p[cells[next]]) < level - rounding) next++
  return { value: p[cells[next]], index: cells[next] }
}

/** Mean, standard deviation, median and mode of a distribution over whole years. */
export interface YearFigures {
  mean: number
  sd: number
  /** The first cell, from `first` on, at which the cumulative probability reaches one half. */
  median: number
  mode: number
}

export function yearFigures(probability: Float64Array, first: number): YearFigures {
  let mean = 0
  let square = 0
  let mode = 0
  let median = -1
  let sum = 0
  // Squares are taken about the middle of the cells, which is close enough to the mean to lose no digits that matter.
  const middle = probability.length >> 1
  for (let i = 0; i < probability.length; i++) {
    const p = probability[i]
    mean += (i - middle) * p
    square += (i - middle) * (i - middle) * p
    if (p > probability[mode]) mode = i
    sum += p
    if (median < 0 && sum >= 0.5 - rounding) median = i
  }
  const sd = Math.sqrt(Math.max(0, square - mean * mean))
  return { mean: first + middle + mean, sd, median: first + median, mode: first + mode }
}

/** Scales a distribution to the sum 1 in place and returns the sum it had. */
export function normalise(probability: Float64Array): number {
  let sum = 0
  for (const one of probability) sum += one
  if (sum > 0) for (let i = 0; i < probability.length; i++) probability[i] /= sum
  return sum
}
