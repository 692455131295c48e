import { checkInteger, Fault } from '../check.ts'
import type { Work } from '../work.ts'
import { countChain, chainDefaults } from './countChain.ts'
import type { ChainOptions, CountChain } from './countChain.ts'
import type { CountedLayers } from './countedLayers.ts'
import { crossCheck } from './crossCheck.ts'
import type { CrossCheck } from './crossCheck.ts'
import type { Curve, YearlyCurve } from './curve.ts'
import { CurveShelf } from './curveShelf.ts'
import { anchorYear, dateLikelihood } from './dates.ts'
import type { CoreDate, DateLikelihood } from './dates.ts'
import { calendarAges, latticeDefaults } from './lattice.ts'
import type { DatedChronology, LatticeOptions } from './lattice.ts'
import { yearsBetweenRows } from './latticeBetween.ts'
import { sampleYears } from './latticeSamples.ts'
import { SamplePlaces } from './samplePlace.ts'
import type { WholeYears } from './stepLaws.ts'

/** A counted core and all that ties it to the calendar. */
export interface DatingRequest {
  layers: CountedLayers
  dates: readonly CoreDate[]
  /** Astronomical year in which the top layer was laid down; null: the count floats. */
  topYear: number | null
  /** Calibration curves beside the built-in one; see CurveShelf. */
  curves: readonly Curve[]
  chain?: Partial<ChainOptions>
  lattice?: Partial<LatticeOptions>
}

/** A date that cannot be used, and why. */
export interface DateProblem {
  /** Index into the dates of the request. */
  date: number
  message: string
}

/** The request made ready for the lattice. */
export interface PreparedDating {
  chain: CountChain
  /** The anchor first, where there is one; then the dates in their order. */
  dates: DateLikelihood[]
  curves: YearlyCurve['sources']
  problems: DateProblem[]
}

/** The anchored core: ages of every row, every date against the others, and what both say of the count. */
export interface DatingResult extends DatedChronology {
  crossCheck: CrossCheck
  curves: YearlyCurve['sources']
}

/** What the year of the top layer is called among the dates. */
export const topId = 'top'

/** Places every date in the core and works out its likelihood; dates that cannot be used are named, not thrown. */
export function prepareDating(request: DatingRequest): PreparedDating {
  const options = { ...chainDefaults, ...request.chain }
  const cuts = request.dates.map(({ top, base }) => (top + base) / 2)
  const chain = countChain(request.layers, options, cuts)
  const places = new SamplePlaces(request.layers, chain)
  const shelf = new CurveShelf(request.curves)
  const used = new Map<string, YearlyCurve['sources'][number]>()
  const dates: DateLikelihood[] = []
  const problems: DateProblem[] = []
  if (request.topYear !== null)
    dates.push(anchorYear(topId, 0, checkInteger('top year', request.topYear, -100_000, 3000)))
  for (const [d, date] of request.dates.entries()) {
    try {
      const curve = shelf.curve(date.curve)
      dates.push(dateLikelihood(date, places.place(date.top, date.base), curve))
      if (date.kind !== 'year') for (const source of curve.sources) used.set(source.sha256, source)
    } catch (error) {
      if (!(error instanceof Fault)) throw error
      problems.push({ date: d, message: error.message })
    }
  }
  return { chain, dates, curves: [...used.values()], problems }
}

/** The request made ready; a date that cannot be used is a Fault. */
function preparedOrRefused(request: DatingRequest): PreparedDating {
  const prepared = prepareDating(request)
  if (prepared.problems.length > 0) {
    const words = prepared.problems.map(({ date, message }) => `${request.dates[date].id}: ${message}`).join('; ')
    throw new Fault('argument', 'dates', prepared.problems.length, words)
  }
  return prepared
}

/** Dates a core. A date that cannot be used is a Fault: leave it out first. */
export function* dateCore(request: DatingRequest): Work<DatingResult> {
  const { chain, dates, curves } = preparedOrRefused(request)
  const lattice = { ...latticeDefaults, ...request.lattice }
  const chronology = yield* calendarAges(chain, dates, lattice)
  return { ...chronology, crossCheck: crossCheck(chain, dates, chronology, lattice.biasSd), curves }
}

/** The distribution of the years between two rows of the layers, given everything; see yearsBetweenRows. */
export function* coreYearsBetween(request: DatingRequest, upper: number, lower: number): Work<WholeYears> {
  const { chain, dates } = preparedOrRefused(request)
  return yield* yearsBetweenRows(chain, dates, upper, lower, { ...latticeDefaults, ...request.lattice })
}

/** Whole chronologies drawn from the posterior, [samples x rows]; see sampleYears. */
export function* coreSamples(request: DatingRequest, samples: number, seed: number): Work<Int32Array> {
  const { chain, dates } = preparedOrRefused(request)
  return yield* sampleYears(chain, dates, samples, seed, { ...latticeDefaults, ...request.lattice })
}
