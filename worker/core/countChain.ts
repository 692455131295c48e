import { checkWithin, Fault } from '../check.ts'
import { checkLayers, layerRowKinds } from './countedLayers.ts'
import type { CountedLayers } from './countedLayers.ts'
import { unreadableYears } from './unreadableYears.ts'
import type { YearsInside } from './unreadableYears.ts'

export interface ChainOptions {
  /** Expected number of years missed by the count at each boundary, beside the probabilities. */
  missedRate: number
  /** Years lost in a hiatus: any whole number from..to is as likely as another; by row, or else by default. */
  hiatusYears: [number, number]
  hiatuses?: ReadonlyMap<number, [number, number]>
}

/** Nothing is known of a hiatus without a range but that it is shorter than this (our own figure). */
export const chainDefaults: ChainOptions = { missedRate: 0, hiatusYears: [0, 2000] }

/** A step that takes a number of years with a law of its own. */
export type GapLaw = ({ kind: 'unreadable' } & YearsInside) | { kind: 'hiatus'; from: number; to: number }

/**
 * The count as a chain of steps downcore: step i leads from level i - 1 to level i. A level's year is the calendar year in
 * which its sediment was laid down (of an unreadable span: of its youngest sediment).
 */
export interface CountChain {
  levels: number
  /** Probability that a year ends at step i, [levels]; element 0 is not used. */
  ends: Float64Array
  /** Expected number of years missed at step i, [levels]. */
  missed: Float64Array
  /** Steps whose years have another law; their `ends` and `missed` are 0. */
  gaps: ReadonlyMap<number, GapLaw>
  /** Level of each row, [rows]. */
  levelOfRow: Int32Array
  /** Depth of each level, mm, [levels]. */
  depth: Float64Array
}

/**
 * Makes the chain. A measured unreadable span is cut at each of `cuts` (depths, mm) that lies in it, so that a date inside
 * it has a level of its own.
 */
export function countChain(layers: CountedLayers, options: ChainOptions, cuts: readonly number[] = []): CountChain {
  checkLayers(layers)
  checkWithin('missed years per boundary', options.missedRate, 0, 1)
  const rows = layers.depth.length
  const steps = new Steps()
  const levelOfRow = new Int32Array(rows)
  let started = false
  for (let row = 0; row < rows; row++) {
    const kind = layerRowKinds[layers.kind[row]]
    const counts = started && (kind === 'varve' || kind === 'unreadable')
    if (counts) steps.add(layers.depth[row], layers.probability[row], options.missedRate)
    else steps.add(layers.depth[row], 0, 0)
    // Beds above the first counted row have its year.
    started ||= kind !== 'event'
    levelOfRow[row] = steps.last
    if (kind === 'hiatus') steps.next = { kind, ...rangeOf(options, row) }
    if (kind === 'unreadable' && !Number.isNaN(layers.thickness[row])) steps.addSpan(layers, row, cuts)
  }
  return steps.chain(levelOfRow)
}

/** Levels under construction; a pending gap law replaces what the next step would have been. */
class Steps {
  private readonly depth: number[] = []
  private readonly ends: number[] = []
  private readonly missed: number[] = []
  private readonly gaps = new Map<number, GapLaw>()
  next: GapLaw | null = null

  get last(): number {
    return this.depth.length - 1
  }

  add(depth: number, ends: number, missed: number): void {
    const gap = this.next
    if (gap) this.gaps.set(this.depth.length, gap)
    this.depth.push(depth)
    this.ends.push(gap ? 0 : ends)
    this.missed.push(gap ? 0 : missed)
    this.next = null
  }

  /** A measured unreadable span, in as many parts as there are cuts; its variance is shared out by length. */
  addSpan(layers: CountedLayers, row: number, cuts: readonly number[]): void {
    const from = layers.depth[row]
    const to = from + layers.thickness[row]
    const years = unreadableYears(layers, row)
    const inside = [...new Set(cuts.filter((cut) => cut > from && cut < to))].sort((a, b) => a - b)
    let at = from
    for (const cut of [...inside, to]) {
      const share = (cut - at) / (to - from)
      this.next = { kind: 'unreadable', mean: share * years.mean, variance: share * years.variance }
      if (cut < to) this.add(cut, 0, 0)
      at = cut
    }
  }

  chain(levelOfRow: Int32Array): CountChain {
    return {
      levels: this.depth.length,
      ends: Float64Array.from(this.ends),
      missed: Float64Array.from(this.missed),
      gaps: this.gaps,
      levelOfRow,
      depth: Float64Array.from(this.depth),
    }
  }
}

function rangeOf(options: ChainOptions, row: number): { from: number; to: number } {
  const [from, to] = options.hiatuses?.get(row) ?? options.hiatusYears
  if (!(Number.isInteger(from) && Number.isInteger(to) && from >= 0 && to >= from && to <= 20_000)) {
    throw new Fault(
      'argument',
      'hiatus years',
      `${from}..${to}`,
      `the years lost in a hiatus must be whole numbers from 0 to 20000, the smaller first; they are ${from} to ${to}`,
    )
  }
  return { from, to }
}

/** Expected number of years from the top to each level, [levels], by the count alone and without bias. */
export function expectedYears(chain: CountChain): Float64Array {
  const years = new Float64Array(chain.levels)
  for (let i = 1; i < chain.levels; i++) {
    const gap = chain.gaps.get(i)
    const step = gap ? (gap.kind === 'hiatus' ? (gap.from + gap.to) / 2 : gap.mean) : chain.ends[i] + chain.missed[i]
    years[i] = years[i - 1] + step
  }
  return years
}
