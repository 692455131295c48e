import type { Work } from '../work.ts'
import type { Candidates } from './candidates.ts'
import { featuresOf, firstReference, learnEvidence, logOddsOf, priorEvidence, referenceOf } from './ladderEvidence.ts'
import type { Evidence } from './ladderEvidence.ts'
import { evenInnerLaw } from './layerPairs.ts'
import type { YearLaw } from './layerPairs.ts'
import type { Ground } from './ladderGround.ts'
import { laySites } from './ladderSites.ts'
import type { SitePart } from './ladderSites.ts'
import { layerStatistics } from './layerStatistics.ts'
import { forwardBackward } from './semiMarkov.ts'
import type { Messages } from './semiMarkov.ts'
import { followThickness, ThicknessField } from './thicknessField.ts'
import { thicknessLaw } from './thicknessLaw.ts'

/** What was learned on the core. */
export interface LadderModel {
  law: YearLaw
  field: ThicknessField
  evidence: Evidence
  /** Share of years that left no candidate. */
  missed: number
  rounds: number
}

/** One part of the core between hiatuses, counted. */
export interface CountedPart extends SitePart {
  messages: Messages
}

const rounds = 12
/** Priors, each worth so many layers: spread of log thickness, missed years, unmarked beds, false candidates per layer. */
const prior = { layers: 12, sigma: 0.35, missed: 0.015, bedShare: 0.003, inner: 0.3 }

/**
 * Expectation-maximisation (Dempster, Laird & Rubin 1977): the ladder's probabilities under the present parameters,
 * then the parameters that fit them, a fixed number of rounds.
 */
export function* fitLadder(
  candidates: Candidates,
  ground: Ground,
  fixed: Float64Array,
  thickness: (position: number) => number,
): Work<{ model: LadderModel; parts: CountedPart[] }> {
  const field = new ThicknessField(ground, thickness)
  const layers = field.coordinate(ground.rows)
  let reference = firstReference(candidates, layers)
  let features = featuresOf(candidates, reference)
  let law: YearLaw = { thickness: thicknessLaw(prior.sigma, prior.bedShare), inner: evenInnerLaw(prior.inner) }
  let missed = prior.missed
  let evidence = priorEvidence()
  let parts: CountedPart[] = []
  for (let round = 0; round < rounds; round++) {
    yield { stage: 'ladder', done: round, total: rounds }
    const logWeight = logOddsOf(features, evidence)
    parts = laySites(candidates, logWeight, ground, field, fixed, missed).map((part) => ({
      ...part,
      messages: forwardBackward(part.stretch, law),
    }))
    if (round === rounds - 1) break
    const belief = beliefs(candidates.position.length, parts)
    const found = layerStatistics(parts, law, field)
    law = {
      thickness: thicknessLaw(found.sigma(prior.sigma, prior.layers), found.bedShare(prior.bedShare, 4 * prior.layers)),
      inner: found.inner(prior.inner, prior.layers),
    }
    followThickness(field, found.count, found.logSum)
    const { years, hidden } = tally(parts)
    missed = Math.min(0.2, (hidden + prior.missed * 4 * prior.layers) / (years + 4 * prior.layers))
    reference = referenceOf(candidates, belief, reference)
    features = featuresOf(candidates, reference)
    evidence = learnEvidence(features, belief, evidence)
  }
  return { model: { law, field, evidence, missed, rounds }, parts }
}

/** Posterior of each candidate; 0 for those no site stands for. */
export function beliefs(count: number, parts: CountedPart[]): Float64Array {
  const belief = new Float64Array(count)
  for (const { candidate, messages } of parts) {
    for (let i = 0; i < candidate.length; i++) if (candidate[i] >= 0) belief[candidate[i]] = messages.probability[i]
  }
  return belief
}

/** Expected numbers of all years in readable ground, and of those without a candidate. */
function tally(parts: CountedPart[]) {
  let years = 0
  let hidden = 0
  for (const { kind, messages } of parts) {
    for (let i = 0; i < kind.length; i++) {
      if (kind[i] === 'unreadable') continue
      years += messages.probability[i]
      if (kind[i] === 'missed') hidden += messages.probability[i]
    }
  }
  return { years, hidden }
}
