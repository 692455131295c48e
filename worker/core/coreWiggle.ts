import { Fault } from '../check.ts'
import { expectedYears } from './countChain.ts'
import { studentModel } from './errorModel.ts'
import type { ErrorModel } from './errorModel.ts'
import { CurveShelf } from './curveShelf.ts'
import { prepareDating } from './dating.ts'
import type { DatingRequest } from './dating.ts'
import { wiggleMatch } from './wiggle.ts'
import type { WiggleDate, WiggleMatch } from './wiggle.ts'

/** The radiocarbon dates of a core laid on the curve, the count taken as exact: for a look at how the wiggles match. */
export interface CoreWiggle {
  /** Of the year of the top layer, cal BP. */
  match: WiggleMatch
  /** The series: years by which each level is older than the top layer, and what was measured less its offset. */
  series: (WiggleDate & { id: string })[]
  /** The curve about the series at its best place; columns [years], from youngest on. */
  curve: { from: number; age: Float64Array; sigma: Float64Array }
}

/** Years of the curve shown on either side of the series. */
const margin = 150

/**
 * Wiggle match of a core's radiocarbon dates with the expected years of the count between them. It leaves counting errors,
 * bias and known years out: the ages come from the lattice.
 */
export function coreWiggle(request: DatingRequest, model: ErrorModel = studentModel): CoreWiggle {
  const { chain, dates, problems } = prepareDating(request)
  if (problems.length > 0) {
    const words = problems.map(({ date, message }) => `${request.dates[date].id}: ${message}`).join('; ')
    throw new Fault('argument', 'dates', problems.length, words)
  }
  const years = expectedYears(chain)
  const measured = new Map(request.dates.map((date) => [date.id, date]))
  const series = dates.flatMap(({ id, kind, level, value }) => {
    const date = measured.get(id)
    if (kind !== 'c14' || !date) return []
    return [{ id, older: years[level], age: value, sigma: Math.hypot(date.sigma, date.offsetSigma) }]
  })
  if (series.length === 0) {
    throw new Fault(
      'argument',
      'dates',
      0,
      'there is no radiocarbon date among the dates; a wiggle match needs at least one',
    )
  }
  const curve = new CurveShelf(request.curves).curve(undefined)
  const match = wiggleMatch(series, curve, null, model)
  const oldest = Math.max(...series.map(({ older }) => older))
  const first = Math.max(0, match.mode - margin - curve.from)
  const end = Math.min(curve.age.length, Math.ceil(match.mode + oldest) + margin + 1 - curve.from)
  return {
    match,
    series,
    curve: { from: curve.from + first, age: curve.age.slice(first, end), sigma: curve.ageSigma.slice(first, end) },
  }
}
