import type { Work } from '../work.ts'
import { support } from './dates.ts'
import { FilterBand } from './filterBand.ts'
import type { LatticeProblem } from './latticeProblem.ts'
import type { StepLaws } from './stepLaws.ts'

/** Levels between two rows that are kept; the rows between are worked out again on the way back. */
export const segmentLength = 96
/** Levels between two reports of progress. */
const reportEvery = 512
/**
 * A window in which the paths of a floating count may begin is no wider than this, if a share of 1e-6 cut from each end of
 * the likelihoods can prevent it: the heavy tails of a single Student's t reach the end of the curve.
 */
const widestStart = 4000
const relaxedCut = 1e-6
/** Ages left out with one date removed are exact to this many times the cut. */
export const leaveOneOutSlack = 1000

/** What the way down leaves behind, for one value of the bias. */
export interface ForwardPass {
  laws: StepLaws
  /** Band of x at each level: x from low to low + width - 1, [levels]; width 0 above the first date. */
  low: Int32Array
  width: Int32Array
  /** Filtered distributions before the dates of their level, one for each segment, on that level's band. */
  kept: Float64Array[]
  /** Log of the sum of the filtered distribution at a level with dates, before them, on that level's band. */
  logBefore: Map<number, number>
  logEvidence: number
  /** SD of x at the first level with dates, given these. */
  startSd: number
  /** Log of the sum, over the dates, of (largest likelihood x evidence without the date). */
  logWithoutOne: number
  /** Mean and SD of x at the levels with dates and at the last level, given the dates above. */
  watched: { level: number; mean: number; sd: number }[]
}

/** How much may be cut: log of (share x evidence), to be compared with what a path at a level may still come to. */
export interface Trim {
  logLeast: number
  /** Instead: follow only the bulk, this share of what is at the level; for a first, lower estimate of the evidence. */
  beam: number
}

/**
 * The way down (filtering): a(x), the joint probability of all dates down to a level and of the level's year, for x on a band
 * that follows the mass. Beside it runs s(x), the same with the likelihood of one date replaced by its maximum: where
 * a + s could no longer come to anything even if all further dates were met at their best, the band is cut. So neither the
 * posterior nor any leave-one-out distribution loses more than the cut, however badly a date fits.
 */
export function* forwardPass(problem: LatticeProblem, laws: StepLaws, trim: Trim): Work<ForwardPass> {
  const { chain, dates, datesAt, first } = problem
  const { levels } = chain
  const pass: ForwardPass = {
    laws,
    low: new Int32Array(levels),
    width: new Int32Array(levels),
    kept: [],
    logBefore: new Map(),
    logEvidence: -Infinity,
    startSd: 0,
    logWithoutOne: -Infinity,
    watched: [],
  }
  const band = new FilterBand(startWindow(problem, laws))
  for (let i = first; i < levels; i++) {
    if (i > first) band.step(laws, i)
    const here = datesAt.get(i)
    if (here || i === levels - 1) pass.watched.push({ level: i, ...band.figures() })
    const keep = (i - first) % segmentLength === 0 || here ? band.copy() : null
    for (const d of here ?? []) band.meet(dates[d], 1 / leaveOneOutSlack)
    if (i === first) pass.startSd = band.figures().sd
    if (!band.trim(limitAt(problem, trim, band, i))) return pass
    pass.low[i] = band.low
    pass.width[i] = band.width
    if (keep) keepRow(pass, keep, band, i, first)
    if ((i - first) % reportEvery === reportEvery - 1) yield { stage: 'bias', done: i, total: levels }
  }
  const sums = band.sums()
  pass.logEvidence = Math.log(sums.a) + band.logScale
  pass.logWithoutOne = Math.log(sums.s * leaveOneOutSlack) + band.logScale
  return pass
}

/** The largest sum of a + s at one end of the band that may be cut at a level. */
function limitAt({ logStillToGain }: LatticeProblem, trim: Trim, band: FilterBand, level: number): number {
  if (trim.beam > 0) return trim.beam * band.sums().a
  return Math.exp(trim.logLeast - logStillToGain[level] - band.logScale)
}

/** Keeps the part of a row that lies on the band that is left after the dates. */
function keepRow(
  pass: ForwardPass,
  row: { low: number; logScale: number; a: Float64Array },
  band: FilterBand,
  level: number,
  first: number,
): void {
  const part = row.a.slice(band.low - row.low, band.low - row.low + band.width)
  let sum = 0
  for (const one of part) sum += one
  pass.logBefore.set(level, Math.log(sum) + row.logScale)
  if ((level - first) % segmentLength === 0) pass.kept.push(part)
}

/**
 * Where paths may begin. A floating count has no prior at its first date: the years that this date allows, and those to
 * which any of the others would bring it, are all there is. A fixed first date leaves no choice.
 */
function startWindow(problem: LatticeProblem, laws: StepLaws): { low: number; width: number } {
  const exact = windowWithin(problem, laws, problem.options.cut / 2)
  return exact.width <= widestStart ? exact : windowWithin(problem, laws, relaxedCut)
}

/** The hull of all dates' likelihoods, seen from the first dated level, less a share at each end of each. */
function windowWithin({ dates, first }: LatticeProblem, laws: StepLaws, cut: number): { low: number; width: number } {
  const here = dates.filter(({ level }) => level === first)
  const settled = here.some(({ fixed }) => fixed)
  let from = Infinity
  let to = -Infinity
  for (const date of settled ? here : dates) {
    const there = support(date, cut)
    const years = laws.mean[date.level] - laws.mean[first]
    const spread = date.level === first ? 0 : 8 * Math.sqrt(laws.variance[date.level] - laws.variance[first]) + 3
    from = Math.min(from, Math.floor(there.from - years - spread))
    to = Math.max(to, Math.ceil(there.to - years + spread))
  }
  return { low: from, width: to - from + 1 }
}
