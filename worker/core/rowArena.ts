/** Empty cells on either side of every row, so that a step reads past its ends without asking. */
export const pad = 2

/** A distribution over x = low ... low + width - 1: x is at index at + x - low of `values`, with `pad` empty cells around. */
export interface Row {
  values: Float64Array
  at: number
  low: number
  width: number
}

/** A row with memory of its own. */
export function emptyRow(low: number, width: number): Row {
  return { values: new Float64Array(width + 2 * pad), at: pad, low, width }
}

/** A row that outlives the arena it lies in. */
export function keptRow({ values, at, low, width }: Row): Row {
  const kept = emptyRow(low, width)
  kept.values.set(values.subarray(at, at + width), pad)
  return kept
}

/** The rows of a segment's levels in one buffer that is used again and again: half a million small arrays are slow to make. */
export class RowArena {
  private values = new Float64Array(0)

  /** Empty rows, one for each pair of low and width. */
  rows(bands: readonly { low: number; width: number }[]): Row[] {
    const total = bands.reduce((sum, { width }) => sum + width + 2 * pad, 0)
    if (this.values.length < total) this.values = new Float64Array(Math.ceil(total * 1.25))
    else this.values.fill(0, 0, total)
    let at = 0
    return bands.map(({ low, width }) => {
      const row = { values: this.values, at: at + pad, low, width }
      at += width + 2 * pad
      return row
    })
  }
}

export function sumOf({ values, at, width }: Row): number {
  let sum = 0
  for (let k = at; k < at + width; k++) sum += values[k]
  return sum
}
