/**
 * Repeat counts compared: which boundaries the counters share, how far they agree, and how many years there are, by every
 * published convention side by side and by the counter model. Alignment, agreement, error: the parts are in the files
 * imported here, in that order.
 */
import { checkFinite, checkOneOf, checkWithin, Fault } from '../check.ts'
import type { Work } from '../work.ts'
import { alignCounts, certain, defaultAlignment, doubtful, type Alignment, type AlignmentOptions } from './alignment.ts'
import type { ChaoEstimate } from './captureRecapture.ts'
import { cellsOf, qualityClasses, type QualityClass } from './counterCells.ts'
import type { CounterMarks } from './counterMarks.ts'
import { defaultSampler, sampleCounters, type SamplerOptions } from './counterModel.ts'
import { repeatCountError, type HalfLayerError, type RepeatCountError } from './countingError.ts'
import type { FleissKappa } from './kappa.ts'
import { latentYears, type LatentYears } from './latentYears.ts'
import {
  chaoOf,
  disagreementsOf,
  disputedOf,
  fleissOf,
  ownPositions,
  pairAgreements,
  patternsOf,
  siteHalfLayer,
  unmarkedCandidates,
  type PairAgreement,
  type SitePattern,
} from './siteAgreement.ts'
import { stretchErrors, totalOf, type CounterTotal, type StretchError } from './stretchError.ts'

export type { PairAgreement, SitePattern } from './siteAgreement.ts'
export type { CounterTotal, StretchError } from './stretchError.ts'

/** A stretch that a counter judged; whatever no span covers is clear. */
export interface QualitySpan {
  from: number
  to: number
  quality: QualityClass
}

/** What is asked beside the counts; whatever is left out has its default. */
export interface AgreementOptions {
  alignment: AlignmentOptions
  sampler: SamplerOptions
  /** SD of the bias that all counters share, as a fraction of the years. */
  systematicSd: number
  /** Levels between which the errors are told, in the unit of the positions. */
  horizons: number[]
  quality: QualitySpan[]
  /** Boundaries proposed by no counter (from the image), so that what all left out can be seen; null: none. */
  candidates: Float64Array | null
}

/** Default SD of the shared bias: our own figure, of the size that independent dating has shown (1-3 %, from memory). */
export const defaultSystematicSd = 0.02

export const defaultAgreement: AgreementOptions = {
  alignment: defaultAlignment,
  sampler: defaultSampler,
  systematicSd: defaultSystematicSd,
  horizons: [],
  quality: [],
  candidates: null,
}

export interface Agreement {
  /** Aligned sites; positions in the unit of the counts. */
  alignment: Alignment
  /** Each counter's own position at each site, NaN where absent, [sites x counters], row-major. */
  own: Float64Array
  totals: CounterTotal[]
  /** Spread of the totals, doubtful layers as one half. */
  spread: RepeatCountError
  whole: StretchError
  /** Between neighbouring horizons, and from the top down to each of them; empty without horizons. */
  intervals: StretchError[]
  cumulative: StretchError[]
  /** The half-layer rule on the sites: certain where all who looked were, else half a year. */
  siteHalfLayer: HalfLayerError
  pairs: PairAgreement[]
  /** Over the sites that everyone looked at; null with a single counter or without such sites. */
  fleiss: FleissKappa | null
  chao: ChaoEstimate
  /** How often each pattern of labels occurs, most frequent first. */
  patterns: SitePattern[]
  /** Candidates that no counter marked; null where none were given. */
  unmarkedCandidates: number | null
  /** Sites that not everyone who looked marked, with or without doubt. */
  disputed: Int32Array
  /** Sites where those who looked did not all say the same: the disputed ones, and those where only some were in doubt. */
  disagreements: Int32Array
  /** Probability of each site to be a year: of the model, or with a single counter by the half-layer rule, [sites]. */
  probability: Float64Array
  /** Null with a single counter: then only the half-layer rule is left. */
  latent: LatentYears | null
}

/** Compares counts of the same stretch; yields progress. */
export function* compareCounts(counts: CounterMarks[], options: Partial<AgreementOptions> = {}): Work<Agreement> {
  const request = { ...defaultAgreement, ...options }
  const { systematicSd, sampler } = request
  checkNames(counts)
  checkWithin('systematic SD', systematicSd, 0, 1)
  const horizons = checkedHorizons(request.horizons)
  yield { stage: 'alignment', done: 0, total: 1 }
  const alignment = alignCounts(counts, request.alignment)
  const unmarked = unmarkedCandidates(request.candidates, alignment, request.alignment.tolerance)
  const cells = cellsOf(alignment, qualityOfSites(alignment, request.quality))
  const draws = counts.length > 1 ? yield* sampleCounters(cells, sampler) : null
  const latent = draws ? latentYears(alignment, cells, draws, sampler.priors, systematicSd) : null
  const errors = stretchErrors(alignment, draws ? { cells, draws } : null)
  const ends = horizons.length > 0 ? [-Infinity, ...horizons, Infinity] : []
  const whole = errors(-Infinity, Infinity)
  const totals = counts.map(totalOf)
  return {
    alignment,
    own: ownPositions(alignment, counts),
    totals,
    spread: repeatCountError(totals.map(({ halfLayer }) => halfLayer.years)),
    // The draws of the whole say more of its interval than the mixture that stretches are told by.
    whole: latent && whole.latent ? { ...whole, latent: { ...whole.latent, years95: latent.years95 } } : whole,
    intervals: ends.slice(1).map((to, i) => errors(ends[i], to)),
    cumulative: ends.slice(1).map((to) => errors(-Infinity, to)),
    siteHalfLayer: siteHalfLayer(alignment),
    pairs: pairAgreements(alignment, unmarked ?? 0),
    fleiss: fleissOf(alignment, unmarked ?? 0),
    chao: chaoOf(alignment),
    patterns: patternsOf(alignment),
    unmarkedCandidates: unmarked,
    disputed: disputedOf(alignment),
    disagreements: disagreementsOf(alignment),
    probability: latent ? latent.probability : halfLayerProbability(alignment),
    latent,
  }
}

function checkNames(counts: readonly CounterMarks[]): void {
  const names = counts.map(({ name }) => name)
  const repeated = names.find((name, k) => names.indexOf(name) !== k)
  if (repeated === undefined) return
  const message = `two counts are called ${repeated}; give each counter and each pass a name of its own`
  throw new Fault('argument', 'counts', repeated, message)
}

function checkedHorizons(horizons: readonly number[]): number[] {
  horizons.forEach((horizon, i) => checkFinite(`horizon ${i + 1}`, horizon))
  return [...new Set(horizons)].sort((a, b) => a - b)
}

/** Index into qualityClasses, [sites]; null when no span was judged. */
function qualityOfSites({ position }: Alignment, spans: readonly QualitySpan[]): Uint8Array | null {
  if (spans.length === 0) return null
  const quality = new Uint8Array(position.length)
  for (const [i, span] of spans.entries()) {
    const index = qualityClasses.indexOf(checkOneOf(`quality of span ${i + 1}`, span.quality, qualityClasses))
    if (!(span.to > span.from)) {
      const extent = `${span.from} to ${span.to}`
      throw new Fault(
        'argument',
        `span ${i + 1}`,
        extent,
        `span ${i + 1} of quality must end below its start; it runs from ${extent}`,
      )
    }
    position.forEach((at, s) => {
      if (at >= span.from && at < span.to) quality[s] = index
    })
  }
  return quality
}

/** With one counter: certain 1, doubtful one half (Rasmussen et al. 2006). */
function halfLayerProbability({ label }: Alignment): Float64Array {
  return Float64Array.from(label, (one) => (one === certain ? 1 : one === doubtful ? 0.5 : 0))
}
