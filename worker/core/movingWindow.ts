import { Fault } from '../check.ts'
import { atRow, type PerRow } from './runs.ts'

/**
 * The window of a row reaches `half` rows to either side, whole rows, and is cut off at the ends of the column.
 * It may change from row to row; the cost is that of the rows that enter and leave.
 */
function checkHalf(half: PerRow, rows: number): void {
  if (typeof half !== 'number' && half.length !== rows) {
    throw new Fault(
      'argument',
      'half',
      half.length,
      `half windows must be as many as there are rows (${rows}); there are ${half.length}`,
    )
  }
  for (let row = 0; row < (typeof half === 'number' ? Math.min(1, rows) : rows); row++) {
    const value = atRow(half, row)
    if (!Number.isInteger(value) || value < 0) {
      throw new Fault(
        'argument',
        'half',
        value,
        `half a window must be a whole number of at least 0; at row ${row} it is ${value}`,
      )
    }
  }
}

/** How many values of each rank lie in the window, as a binary indexed tree (Fenwick 1994): O(log n) to add and to find the k-th. */
function rankCounter(ranks: number) {
  let top = 1
  while (top * 2 <= ranks) top *= 2
  const tree = new Int32Array(ranks + 1)
  return {
    add(rank: number, change: number): void {
      for (let node = rank + 1; node <= ranks; node += node & -node) tree[node] += change
    },
    /** Rank of the k-th smallest value in the window, k from 0. */
    kth(k: number): number {
      let node = 0
      let left = k
      for (let step = top; step > 0; step >>= 1) {
        const next = node + step
        if (next <= ranks && tree[next] <= left) {
          node = next
          left -= tree[next]
        }
      }
      return node
    },
  }
}

/** Rank of every finite value among the sorted distinct values; -1 in a gap. */
function rankRows(column: Float64Array): { ranks: Int32Array; values: Float64Array } {
  const sorted = column.filter((value) => Number.isFinite(value)).sort()
  let count = 0
  for (const value of sorted) {
    if (count === 0 || sorted[count - 1] !== value) sorted[count++] = value
  }
  const values = sorted.subarray(0, count)
  const ranks = new Int32Array(column.length).fill(-1)
  for (let row = 0; row < column.length; row++) {
    const value = column[row]
    if (!Number.isFinite(value)) continue
    let low = 0
    let high = count - 1
    while (low < high) {
      const middle = (low + high) >> 1
      if (values[middle] < value) low = middle + 1
      else high = middle
    }
    ranks[row] = low
  }
  return { ranks, values }
}

/**
 * Median of the readable rows in a window around each row; the mean of the two middle values where they are even in number.
 * A row that is itself a gap stays a gap (NaN); gaps in the window are left out.
 */
export function movingMedian(column: Float64Array, half: PerRow): Float64Array {
  const rows = column.length
  checkHalf(half, rows)
  const median = new Float64Array(rows).fill(NaN)
  const { ranks, values } = rankRows(column)
  if (values.length === 0) return median
  const counter = rankCounter(values.length)
  let from = 0
  let to = 0
  let count = 0
  const change = (row: number, by: number) => {
    if (ranks[row] < 0) return
    counter.add(ranks[row], by)
    count += by
  }
  for (let row = 0; row < rows; row++) {
    const reach = atRow(half, row)
    const first = Math.max(0, row - reach)
    const end = Math.min(rows, row + reach + 1)
    while (to < end) change(to++, 1)
    while (from > first) change(--from, 1)
    while (to > end) change(--to, -1)
    while (from < first) change(from++, -1)
    if (ranks[row] < 0) continue
    const upper = counter.kth(count >> 1)
    median[row] = count % 2 === 1 ? values[upper] : (values[upper] + values[counter.kth((count >> 1) - 1)]) / 2
  }
  return median
}

/** Mean of the readable rows in a window around each row; a row that is itself a gap stays a gap (NaN). */
export function movingMean(column: Float64Array, half: PerRow): Float64Array {
  const rows = column.length
  checkHalf(half, rows)
  // Running sums about the mean of the whole column, so that a high, narrow grey range loses no digits.
  let total = 0
  let readable = 0
  for (const value of column) {
    if (Number.isFinite(value)) {
      total += value
      readable++
    }
  }
  const centre = readable > 0 ? total / readable : 0
  const sums = new Float64Array(rows + 1)
  const counts = new Int32Array(rows + 1)
  for (let row = 0; row < rows; row++) {
    const finite = Number.isFinite(column[row])
    sums[row + 1] = sums[row] + (finite ? column[row] - centre : 0)
    counts[row + 1] = counts[row] + (finite ? 1 : 0)
  }
  const mean = new Float64Array(rows).fill(NaN)
  for (let row = 0; row < rows; row++) {
    if (!Number.isFinite(column[row])) continue
    const reach = atRow(half, row)
    const first = Math.max(0, row - reach)
    const end = Math.min(rows, row + reach + 1)
    mean[row] = centre + (sums[end] - sums[first]) / (counts[end] - counts[first])
  }
  return mean
}
