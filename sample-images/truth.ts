import { layout, positionOf, type ErosiveBase } from './deformation.ts'
import type { Crack } from './photograph.ts'
import { coringYear, type Couplet, type Record } from './record.ts'

/** 0.05 mm a pixel, 508 pixels an inch. */
export const mmPerPx = 0.05

/** What a perfect count of the photograph finds. Positions in path pixels of the straight line down its middle. */
export interface Truth {
  scan: string
  width: number
  height: number
  mmPerPx: number
  /** The line, as the command's `--path` takes it. */
  path: string
  coringYear: number
  /** Sharp tops of the winter clays, downcore: where each closed varve year begins. */
  boundaries: number[]
  /** The year of the varve below each boundary, [boundaries]. */
  years: number[]
  /** Years whose clay is hardly to be seen, and years with a second dark lamina as strong as a clay. */
  faint: number[]
  doubled: number[]
  /** Where the second dark laminae lie: marks here are false. */
  doubledAt: number[]
  events: { name: string; kind: 'turbidite' | 'tephra'; year: number; from: number; to: number }[]
  crack: Crack
}

/** The turbidites cut into what lay below them. */
export function erosiveBases(record: Record): ErosiveBase[] {
  return record.couplets.flatMap((couplet) =>
    couplet.bed?.kind === 'turbidite' ? [{ depth: couplet.top + couplet.bed.at + couplet.bed.thickness }] : [],
  )
}

/**
 * Where a bed crosses the middle line, averaged over the middle 200 rows: the tilt is even about the line and falls out,
 * so this is where a count across a band places it.
 */
function onPath(depth: number, bases: ErosiveBase[]): number {
  let sum = 0
  let rows = 0
  for (let y = layout.middle - 99.5; y < layout.middle + 100; y += 3, rows++) sum += positionOf(depth, y, bases)
  return Math.round((100 * sum) / rows) / 100
}

/** Position of the strongest lamina in a doubled year. */
function secondClay(couplet: Couplet): number {
  const strongest = couplet.laminae.reduce((a, b) => (b.darkness > a.darkness ? b : a))
  return couplet.top + strongest.at - 0.3 * strongest.width
}

export function truthOf(record: Record, scan: string, width: number, crack: Crack): Truth {
  const bases = erosiveBases(record)
  const seen = record.couplets
    .map((couplet) => ({ couplet, at: onPath(couplet.top, bases) }))
    .filter(({ at }) => at > 0 && at < width - 1)
  const doubled = seen.filter(({ couplet }) => couplet.doubled)
  return {
    scan,
    width,
    height: layout.height,
    mmPerPx,
    path: `0,${layout.middle} ${width},${layout.middle}`,
    coringYear,
    boundaries: seen.map(({ at }) => at),
    years: seen.map(({ couplet }) => couplet.year),
    faint: seen.filter(({ couplet }) => couplet.faint).map(({ couplet }) => couplet.year),
    doubled: doubled.map(({ couplet }) => couplet.year),
    doubledAt: doubled.map(({ couplet }) => onPath(secondClay(couplet), bases)),
    events: seen.flatMap(({ couplet }) => {
      const { bed, year, top } = couplet
      if (!bed) return []
      const from = onPath(top + bed.at, bases)
      return [{ name: bed.name, kind: bed.kind, year, from, to: onPath(top + bed.at + bed.thickness, bases) }]
    }),
    crack,
  }
}
