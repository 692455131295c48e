import type { LevelAges, YearRanges } from '../../../worker/core/levelAges.ts'
import type { DatedCore } from '../../session/dating.svelte.ts'
import type { AgeDepthData, Band, Calendar, DatedLevel } from '../../view/plots/data.ts'

/** Years of a calendar from astronomical ones; cal BP and b2k count backwards. */
export function inCalendar(calendar: Calendar): (year: number) => number {
  if (calendar === 'cal BP') return (year) => 1950 - year
  if (calendar === 'b2k') return (year) => 2000 - year
  return (year) => year
}

/** The outermost years of all pieces of a range; the plot's band does not show gaps between pieces. */
function envelope(ranges: YearRanges, rows: readonly number[], shown: (year: number) => number): Band {
  const ends = rows.map((row) => {
    let from = Infinity
    let to = -Infinity
    for (let k = ranges.start[row]; k < ranges.start[row + 1]; k++) {
      from = Math.min(from, ranges.from[k])
      to = Math.max(to, ranges.to[k])
    }
    return [shown(from), shown(to)].sort((a, b) => a - b)
  })
  return { low: Float64Array.from(ends, ([low]) => low), high: Float64Array.from(ends, ([, high]) => high) }
}

/** The kind of a row that is a year seen on the scan: the first of the worker's `layerRowKinds`. */
const varve = 0

/** Rows of the layers that are years: event beds and hiatuses have no age of their own to draw. */
export function yearRows({ layers }: DatedCore): number[] {
  return [...layers.kind.keys()].filter((row) => layers.kind[row] === varve)
}

/** The dated core as the age-depth plot takes it: posterior median with its 68 and 95 % ranges, dates with their densities. */
export function datedPlot(dated: DatedCore, calendar: Calendar, spans: AgeDepthData['spans']): AgeDepthData {
  const shown = inCalendar(calendar)
  const rows = yearRows(dated)
  const { ages } = dated.result
  const depth = Float64Array.from(rows, (row) => dated.layers.depth[row])
  return {
    calendar,
    depth,
    central: Float64Array.from(rows, (row) => shown(ages.median[row])),
    centralName: 'Posterior median',
    band68: envelope(ages.hpd68, rows, shown),
    band95: envelope(ages.hpd95, rows, shown),
    counters: [],
    dates: datedLevels(dated, shown),
    spans,
    depthUnit: depth[depth.length - 1] > 300 ? 'cm' : 'mm',
  }
}

function datedLevels({ result, dates }: DatedCore, shown: (year: number) => number): DatedLevel[] {
  return dates.flatMap((date) => {
    const check = result.checks.find(({ id }) => id === date.id)
    if (!check) return []
    const { low, probability } = check.alone
    return [
      {
        id: date.label || date.id,
        depthFrom: date.top,
        depthTo: date.base,
        years: Float64Array.from(probability, (_, i) => shown(-(low + i))),
        density: probability,
        doubtful: check.outlierProbability > 0.5,
      },
    ]
  })
}

/** The pieces of a row's range in a calendar, older end first, as text. */
export function rangeText(ranges: YearRanges, row: number, write: (year: number) => string): string {
  const pieces: string[] = []
  for (let k = ranges.start[row]; k < ranges.start[row + 1]; k++) {
    pieces.push(
      ranges.from[k] === ranges.to[k] ? write(ranges.from[k]) : `${write(ranges.from[k])} to ${write(ranges.to[k])}`,
    )
  }
  return pieces.join('; ')
}

/** Median, SD and 95 % range of the deepest year. */
export function deepest(dated: DatedCore): { row: number; ages: LevelAges } | null {
  const row = yearRows(dated).at(-1)
  return row === undefined ? null : { row, ages: dated.result.ages }
}
