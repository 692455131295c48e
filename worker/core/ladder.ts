import { checkInteger, checkPositive, Fault } from '../check.ts'
import { seededRandom } from '../random.ts'
import type { Work } from '../work.ts'
import { findCandidates } from './candidates.ts'
import type { CandidateRecipe, Candidates } from './candidates.ts'
import { detrendProfile } from './detrend.ts'
import type { Detrended, DetrendRecipe } from './detrend.ts'
import { layGround } from './ladderGround.ts'
import { fitLadder } from './ladderModel.ts'
import type { CountedPart, LadderModel } from './ladderModel.ts'
import { sampleStretch } from './ladderSamples.ts'
import { mostProbableLadder } from './mostProbableLadder.ts'
import type { Profile } from './profile.ts'
import { checkedBoundaries, checkedSpans } from './spans.ts'
import type { Span } from './spans.ts'
import { summaryOfYears, sumOfYears, yearDistribution } from './yearDistribution.ts'
import type { YearDistribution } from './yearDistribution.ts'

export { spanKinds } from './spans.ts'
export type { Span } from './spans.ts'
export type { YearDistribution } from './yearDistribution.ts'

export interface LadderRecipe {
  /** Expected layer thickness, path pixels; null: from the profile. */
  thickness: number | null
}

/** What stands at a site, by the numbers used in `Ladder.kind`. */
export const siteKinds = ['candidate', 'confirmed', 'missed', 'unreadable'] as const

/** The ladder: everything that may be a boundary with its probability, and the most probable choice; columns [sites], sorted downcore. */
export interface Ladder {
  /** Path pixels. */
  position: Float64Array
  /** Posterior probability that the site is the boundary between two varve years; they sum to expectedYears. */
  probability: Float64Array
  /** 1 where the site belongs to the most probable ladder. */
  chosen: Uint8Array
  /** Index into siteKinds: a year without a candidate is `missed`, one in unreadable ground `unreadable`. */
  kind: Uint8Array
  /** Index into the candidates, -1 where there is none. */
  candidate: Int32Array
  /** Local median thickness the model settled on, path pixels. */
  thickness: Float64Array
  expectedYears: number
  sdYears: number
  /** Smallest whole numbers that leave at most 2.5 % below and above. */
  years95: [number, number]
  /** Probability of each total number of years. */
  total: YearDistribution
  /** The fitted model, for questions about parts of the core: yearsBetween, sampleLadders. */
  fit: { model: LadderModel; parts: CountedPart[] }
}

/**
 * Decides which candidates are years: fits the semi-Markov model to the core and lists every site with its probability.
 * `rows` is the length of the profile; `fixed` are confirmed boundaries, path pixels, sorted.
 */
export function* buildLadder(
  candidates: Candidates,
  rows: number,
  spans: Span[],
  fixed: Float64Array,
  recipe: LadderRecipe,
  detrended?: Detrended,
): Work<Ladder> {
  checkInteger('rows', rows, 0)
  if (recipe.thickness !== null) checkPositive('thickness', recipe.thickness)
  const sorted = checkedSpans(spans, rows)
  checkedBoundaries('confirmed boundaries', fixed, rows)
  if (detrended !== undefined && detrended.signal.length !== rows) {
    throw new Fault(
      'argument',
      'detrended',
      detrended.signal.length,
      `the detrended profile must have ${rows} rows; it has ${detrended.signal.length}`,
    )
  }
  const thickness = startThickness(candidates, rows, recipe, detrended)
  const ground = layGround(rows, sorted, detrended?.signal ?? null, thickness(rows / 2))
  const fit = yield* fitLadder({ candidates, ground, fixed }, thickness)
  return ladderOf(fit)
}

/** The thickness the fit starts from, path pixels at a position. */
function startThickness(candidates: Candidates, rows: number, recipe: LadderRecipe, detrended?: Detrended) {
  const set = recipe.thickness
  if (set !== null) return () => set
  const even = Math.max(2, rows / Math.max(1, candidates.position.length))
  return (position: number) => {
    const local = detrended?.typicalThickness[Math.max(0, Math.min(rows - 1, Math.floor(position)))]
    return local !== undefined && local > 0 ? Math.max(2, local) : even
  }
}

function ladderOf(fit: { model: LadderModel; parts: CountedPart[] }): Ladder {
  const { model, parts } = fit
  const sites = parts.reduce((count, { position }) => count + position.length, 0)
  const ladder = {
    position: new Float64Array(sites),
    probability: new Float64Array(sites),
    chosen: new Uint8Array(sites),
    kind: new Uint8Array(sites),
    candidate: new Int32Array(sites),
    thickness: new Float64Array(sites),
  }
  let total: YearDistribution = { first: 0, probability: Float64Array.of(1) }
  let at = 0
  for (const { stretch, messages, position, kind, candidate } of parts) {
    ladder.position.set(position, at)
    ladder.probability.set(messages.probability, at)
    ladder.candidate.set(candidate, at)
    for (const site of mostProbableLadder(stretch, model.law, messages)) ladder.chosen[at + site] = 1
    for (let i = 0; i < position.length; i++) {
      ladder.kind[at + i] = siteKinds.indexOf(kind[i])
      ladder.thickness[at + i] = model.field.medianAt(position[i])
    }
    total = sumOfYears(total, yearDistribution(stretch, model.law, messages, 0, position.length))
    at += position.length
  }
  const { mean, sd, range95 } = summaryOfYears(total)
  return { ...ladder, expectedYears: mean, sdYears: sd, years95: range95, total, fit }
}

/** The exact distribution of the number of boundaries at depths in (from, to], path pixels. */
export function yearsBetween(ladder: Ladder, from: number, to: number): YearDistribution {
  let total: YearDistribution = { first: 0, probability: Float64Array.of(1) }
  for (const { stretch, messages, position } of ladder.fit.parts) {
    const first = position.findIndex((at) => at > from)
    const after = position.findIndex((at) => at > to)
    if (first < 0) continue
    const last = after < 0 ? position.length : after
    if (last > first) total = sumOfYears(total, yearDistribution(stretch, ladder.fit.model.law, messages, first, last))
  }
  return total
}

/** `count` ladders drawn from the posterior, each as sorted positions in path pixels. */
export function sampleLadders(ladder: Ladder, seed: number, count: number): Float64Array[] {
  checkInteger('number of samples', count, 0)
  const random = seededRandom(seed)
  return Array.from({ length: count }, () => {
    const positions = ladder.fit.parts.flatMap(({ stretch, messages, position }) =>
      sampleStretch(stretch, ladder.fit.model.law, messages, random).map((site) => position[site]),
    )
    return Float64Array.from(positions)
  })
}

/** From profile to years: detrend, find candidates, decide which are years. */
export function* runCount(
  profile: Profile,
  spans: Span[],
  fixed: Float64Array,
  recipe: { detrend: DetrendRecipe; candidates: CandidateRecipe; ladder: LadderRecipe },
): Work<{ detrended: Detrended; candidates: Candidates; ladder: Ladder }> {
  const detrended = yield* detrendProfile(profile, recipe.detrend)
  const candidates = yield* findCandidates(detrended, profile, recipe.candidates)
  const ladder = yield* buildLadder(candidates, profile.intensity.length, spans, fixed, recipe.ladder, detrended)
  return { detrended, candidates, ladder }
}
