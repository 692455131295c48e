/**
 * The same line with at most four vertices for each step along its course: the first, the least, the greatest and the last
 * value (Jugel et al. 2014, M4), so that it looks the same however many points it has and no extreme is lost. `along` must
 * rise or fall throughout; `alongX` says whether it is x. Places where `value` is NaN lift the pen. Returns x, y in turn.
 */
export function decimate(along: ArrayLike<number>, value: ArrayLike<number>, step: number, alongX: boolean): number[] {
  const points: number[] = []
  const add = (i: number) => (alongX ? points.push(along[i], value[i]) : points.push(value[i], along[i]))
  let i = 0
  while (i < along.length) {
    if (Number.isNaN(value[i]) || Number.isNaN(along[i])) {
      points.push(NaN, NaN)
      i += 1
      continue
    }
    const bucket = Math.floor(along[i] / step)
    let [least, greatest, last] = [i, i, i]
    for (let k = i + 1; k < along.length && Math.floor(along[k] / step) === bucket; k++) {
      if (Number.isNaN(value[k])) break
      if (value[k] < value[least]) least = k
      if (value[k] > value[greatest]) greatest = k
      last = k
    }
    let before = -1
    for (const k of [i, Math.min(least, greatest), Math.max(least, greatest), last]) {
      if (k !== before) add(k)
      before = k
    }
    i = last + 1
  }
  return points
}

/** A whole column through a scale. */
export function scaled(column: ArrayLike<number>, scale: (value: number) => number): Float64Array {
  const result = new Float64Array(column.length)
  for (let i = 0; i < column.length; i++) result[i] = scale(column[i])
  return result
}

/** Least and greatest of some columns, NaN left out; null where there is none. */
export function extent(...columns: (ArrayLike<number> | null | undefined)[]): [number, number] | null {
  let least = Infinity
  let most = -Infinity
  for (const column of columns) {
    if (!column) continue
    for (let i = 0; i < column.length; i++) {
      if (column[i] < least) least = column[i]
      if (column[i] > most) most = column[i]
    }
  }
  return least <= most ? [least, most] : null
}
