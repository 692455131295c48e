/** A stretch of rows [from, to) without a gap. */
export interface Run {
  from: number
  to: number
}

/** The stretches of a column between its gaps (NaN or infinite rows), in order. */
export function finiteRuns(column: ArrayLike<number>): Run[] {
  const runs: Run[] = []
  let from = -1
  for (let row = 0; row <= column.length; row++) {
    const readable = row < column.length && Number.isFinite(column[row])
    if (readable && from < 0) from = row
    if (!readable && from >= 0) {
      runs.push({ from, to: row })
      from = -1
    }
  }
  return runs
}

/** Either one value for every row, or a column with a value of its own for each. */
export type PerRow = number | ArrayLike<number>

/** The value a row has of a constant or a column. */
export function atRow(value: PerRow, row: number): number {
  return typeof value === 'number' ? value : value[row]
}

/** Cuts [0 … total] into parts of nearly equal size: [parts + 1] whole numbers that read the same from either end. */
export function evenCuts(total: number, parts: number): Int32Array {
  const cuts = new Int32Array(parts + 1)
  for (let part = 0; part <= parts / 2; part++) {
    cuts[part] = Math.floor((part * total) / parts + 0.5)
    cuts[parts - part] = total - cuts[part]
  }
  return cuts
}
