import { densityAt } from './dates.ts'
import { segmentLength } from './latticeForward.ts'
import type { ForwardPass } from './latticeForward.ts'
import type { LatticeProblem } from './latticeProblem.ts'
import { emptyRow, sumOf } from './rowArena.ts'
import type { Row, RowArena } from './rowArena.ts'
import type { StepLaws, WholeYears } from './stepLaws.ts'

/** Levels of segment k: from, and the level after its last. */
export function segmentLevels({ chain, first }: LatticeProblem, k: number): { from: number; to: number } {
  const from = first + k * segmentLength
  return { from, to: Math.min(from + segmentLength, chain.levels) }
}

export function segments({ chain, first }: LatticeProblem): number {
  return Math.ceil((chain.levels - first) / segmentLength)
}

/** The bands of a pass in a segment, in the order of its levels. */
export function bandsOf({ low, width }: ForwardPass, from: number, to: number): { low: number; width: number }[] {
  const bands = []
  for (let i = from; i < to; i++) bands.push({ low: low[i], width: width[i] })
  return bands
}

/**
 * The filtered distributions of a segment's levels, before the dates of each level, worked out again from the row that the
 * way down kept, on the same bands; element j belongs to level from + j.
 */
export function filteredRows(problem: LatticeProblem, pass: ForwardPass, k: number, arena: RowArena): Row[] {
  const { from, to } = segmentLevels(problem, k)
  const rows = arena.rows(bandsOf(pass, from, to))
  rows[0].values.set(pass.kept[k], rows[0].at)
  for (let i = from + 1; i < to; i++) {
    const before = rows[i - 1 - from]
    const here = problem.datesAt.get(i - 1)
    stepDown(here ? afterDates(problem, before, here).row : before, rows[i - from], pass.laws, i)
  }
  return rows
}

/** A row times the likelihoods of some dates, scaled to the sum 1, and the log of the sum it had. */
export function afterDates(
  { dates }: LatticeProblem,
  row: Row,
  which: readonly number[],
): { row: Row; logSum: number } {
  const met = emptyRow(row.low, row.width)
  for (let k = 0; k < row.width; k++) {
    let value = row.values[row.at + k]
    for (const d of which) value *= densityAt(dates[d], row.low + k)
    met.values[met.at + k] = value
  }
  const sum = sumOf(met)
  if (sum > 0) for (let k = met.at; k < met.at + met.width; k++) met.values[k] /= sum
  return { row: met, logSum: Math.log(sum) }
}

/** Fills `to` with the distribution of x after a number of years with any law: each cell gathers what the law brings to it. */
export function gather(from: Row, to: Row, { first, probability }: WholeYears): void {
  const offset = to.low - first - from.low
  for (let k = 0; k < to.width; k++) {
    const least = Math.max(0, k + offset - from.width + 1)
    const most = Math.min(probability.length - 1, k + offset)
    let sum = 0
    for (let j = least; j <= most; j++) sum += probability[j] * from.values[from.at + k + offset - j]
    to.values[to.at + k] = sum
  }
}

/** Fills `to` (level i) with the distribution of x after step i, from that of level i - 1. */
function stepDown(from: Row, to: Row, laws: StepLaws, i: number): void {
  const gap = laws.gaps.get(i)
  if (gap) {
    gather(from, to, gap)
    return
  }
  const [q0, q1, q2] = [laws.tap[3 * i], laws.tap[3 * i + 1], laws.tap[3 * i + 2]]
  const source = from.values
  const target = to.values
  let s = from.at + to.low - laws.shift[i] - from.low
  const end = to.at + to.width
  for (let k = to.at; k < end; k++, s++) {
    target[k] = q0 * source[s] + q1 * source[s - 1] + q2 * source[s - 2]
  }
}

/** Fills `to` (level i - 1) with the likelihood of all that follows, from that of level i: the adjoint of stepDown. */
export function stepUp(from: Row, to: Row, laws: StepLaws, i: number): void {
  const gap = laws.gaps.get(i)
  if (gap) {
    const offset = to.low + gap.first - from.low
    for (let k = 0; k < to.width; k++) {
      const least = Math.max(0, -(k + offset))
      const most = Math.min(gap.probability.length - 1, from.width - 1 - k - offset)
      let sum = 0
      for (let j = least; j <= most; j++) sum += gap.probability[j] * from.values[from.at + k + offset + j]
      to.values[to.at + k] = sum
    }
    return
  }
  const [q0, q1, q2] = [laws.tap[3 * i], laws.tap[3 * i + 1], laws.tap[3 * i + 2]]
  const source = from.values
  const target = to.values
  const offset = to.low + laws.shift[i] - from.low
  // Cells of the upper row whose years all fall outside the lower one stay empty; two beyond its ends are padding.
  const first = Math.max(0, -offset - 2)
  const end = Math.min(to.width, from.width - offset)
  for (let k = first; k < end; k++) {
    const s = from.at + k + offset
    target[to.at + k] = q0 * source[s] + q1 * source[s + 1] + q2 * source[s + 2]
  }
}

/** The band above `row` from which step i can lead into it. */
export function bandAbove(row: Row, laws: StepLaws, i: number): { low: number; width: number } {
  const gap = laws.gaps.get(i)
  const [least, most] = gap
    ? [gap.first, gap.first + gap.probability.length - 1]
    : [laws.shift[i], laws.shift[i] + (laws.tap[3 * i + 2] > 0 ? 2 : 1)]
  return { low: row.low - most, width: row.width + most - least }
}
