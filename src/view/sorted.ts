/** Index of the first element of a sorted column that is not less than a value; its length where there is none. */
export function lowerBound(column: ArrayLike<number>, value: number, from = 0, to = column.length): number {
  let low = from
  let high = to
  while (low < high) {
    const middle = (low + high) >> 1
    if (column[middle] < value) low = middle + 1
    else high = middle
  }
  return low
}

/** Index of the element of a sorted column nearest to a value; -1 where the column is empty. */
export function nearest(column: ArrayLike<number>, value: number): number {
  const after = lowerBound(column, value)
  if (after === 0) return column.length > 0 ? 0 : -1
  if (after === column.length) return after - 1
  return value - column[after - 1] <= column[after] - value ? after - 1 : after
}
