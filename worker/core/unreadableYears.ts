import { checkAtLeast, checkInteger, checkPositive, Fault } from '../check.ts'
import type { CountedLayers } from './countedLayers.ts'

/** Expected number of years in a stretch that cannot be read, and its variance. */
export interface YearsInside {
  mean: number
  variance: number
}

/** As many layers on either side of a span are taken to speak for it (our own figure). */
const neighbours = 25
/** With fewer neighbours than this their scatter is not known. */
const leastNeighbours = 5

/**
 * Years in an unreadable thickness from layers like it: N = gap / mean; renewal theorem N (sd / mean)^2 for the scatter of
 * thickness inside the gap, N^2 (sd / mean)^2 / n for the error of a mean of n layers (Cox 1962, Renewal Theory).
 */
export function renewalYears(gap: number, mean: number, sd: number, n: number): YearsInside {
  checkAtLeast('gap', gap, 0)
  checkPositive('mean thickness', mean)
  checkAtLeast('SD of thickness', sd, 0)
  checkInteger('number of layers', n, 1)
  const years = gap / mean
  const variation = (sd / mean) ** 2
  return { mean: years, variance: years * variation + (years * years * variation) / n }
}

/**
 * Years in the measured unreadable span of a row, from the nearest 25 layers above and below. Where the two sides differ in
 * their mean thickness, the span may be like the one or the other: the uniform range between the two estimates is added.
 */
export function unreadableYears(layers: CountedLayers, row: number): YearsInside {
  const gap = layers.thickness[row]
  const above = nearest(layers, row, -1)
  const below = nearest(layers, row, 1)
  const all = [...above, ...below]
  if (all.length < leastNeighbours) {
    const message = `the unreadable span in row ${row + 1} has ${all.length} measured layers around it; at least ${leastNeighbours} are needed to say how many years it holds`
    throw new Fault('argument', 'layers', all.length, message)
  }
  const { mean, sd } = figures(all)
  const years = renewalYears(gap, mean, sd, all.length)
  if (above.length < leastNeighbours || below.length < leastNeighbours) return years
  const ends = gap / figures(above).mean - gap / figures(below).mean
  return { mean: years.mean, variance: years.variance + (ends * ends) / 12 }
}

function nearest({ thickness, kind }: CountedLayers, row: number, direction: 1 | -1): number[] {
  const found: number[] = []
  for (let i = row + direction; i >= 0 && i < thickness.length && found.length < neighbours; i += direction) {
    if (kind[i] === 0 && thickness[i] > 0) found.push(thickness[i])
  }
  return found
}

function figures(values: number[]): { mean: number; sd: number } {
  const mean = values.reduce((sum, x) => sum + x, 0) / values.length
  const squares = values.reduce((sum, x) => sum + (x - mean) ** 2, 0)
  return { mean, sd: Math.sqrt(squares / Math.max(1, values.length - 1)) }
}
