/** Marks along an axis: where, and what stands beside; `minor` ones bear no text. */
export interface Tick {
  value: number
  /** Place on the axis, surface units. */
  at: number
  text: string
}

/** Least round step, 1, 2 or 5 times a power of ten, that is not smaller than `least`. */
export function niceStep(least: number): number {
  if (!(least > 0) || !Number.isFinite(least)) return 1
  const power = 10 ** Math.floor(Math.log10(least))
  for (const factor of [1, 2, 5, 10]) {
    // A step asked for exactly must be granted in spite of the rounding of the logarithm.
    if (factor * power >= least * (1 - 1e-9)) return factor * power
  }
  return 10 * power
}

/** How a round step is divided by unlabelled marks: 1 and 10 into tenths or fifths, 2 into quarters, 5 into fifths. */
export function minorStep(step: number, leastMinor: number): number | null {
  const power = 10 ** Math.floor(Math.log10(step) + 1e-9)
  const lead = Math.round(step / power)
  const divisions = lead === 2 ? [4, 2] : lead === 5 ? [5] : [10, 5, 2]
  for (const parts of divisions) if (step / parts >= leastMinor) return step / parts
  return null
}

/** Multiples of a step within [from, to]. */
export function multiples(step: number, from: number, to: number): number[] {
  const values: number[] = []
  const first = Math.ceil(from / step - 1e-9)
  const last = Math.floor(to / step + 1e-9)
  for (let k = first; k <= last; k++) values.push(k * step)
  return values
}

/** A label asking for a place along an axis. */
export interface Wish {
  at: number
  /** Room it takes along the axis, including the gap to the next. */
  room: number
  /** Larger goes first where two wishes meet. */
  weight: number
}

/**
 * Which labels can stand without touching: heavier ones first, among equals the one nearer to the start. Returns indices of
 * the wishes granted, in order along the axis.
 */
export function placeLabels(wishes: readonly Wish[]): number[] {
  const order = wishes
    .map((_, i) => i)
    .sort((a, b) => wishes[b].weight - wishes[a].weight || wishes[a].at - wishes[b].at)
  const granted: number[] = []
  for (const i of order) {
    const place = firstAfter(granted, wishes, wishes[i].at)
    const before = place > 0 ? wishes[granted[place - 1]] : null
    const after = place < granted.length ? wishes[granted[place]] : null
    if (before && !apart(before, wishes[i])) continue
    if (after && !apart(wishes[i], after)) continue
    granted.splice(place, 0, i)
  }
  return granted
}

function apart(a: Wish, b: Wish): boolean {
  return Math.abs(b.at - a.at) >= (a.room + b.room) / 2 - 1e-9
}

/** Place of the first granted wish that lies beyond `at`. */
function firstAfter(granted: readonly number[], wishes: readonly Wish[], at: number): number {
  let low = 0
  let high = granted.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (wishes[granted[middle]].at <= at) low = middle + 1
    else high = middle
  }
  return low
}

/** How round a whole number is: 1000s before 100s before 50s before 10s before 5s before 2s, for choosing which to write. */
export function roundness(value: number): number {
  const whole = Math.abs(Math.round(value))
  if (whole === 0) return 9
  const steps = [5000, 1000, 500, 100, 50, 20, 10, 5, 2]
  for (let k = 0; k < steps.length; k++) if (whole % steps[k] === 0) return steps.length - k
  return 0
}
