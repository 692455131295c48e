import type { Work } from '../work.ts'
import type { Candidates } from './candidates.ts'
import { featuresOf, learnEvidence } from './ladderEvidence.ts'
import type { Evidence } from './ladderEvidence.ts'
import type { Ground } from './ladderGround.ts'
import { laySites } from './ladderSites.ts'
import type { SitePart } from './ladderSites.ts'
import { layerStatistics } from './layerStatistics.ts'
import { forwardBackward } from './semiMarkov.ts'
import type { Messages } from './semiMarkov.ts'
import { followThickness, ThicknessField } from './thicknessField.ts'
import { thicknessLaw } from './thicknessLaw.ts'
import type { ThicknessLaw } from './thicknessLaw.ts'

/** What was learned on the core. */
export interface LadderModel {
  law: ThicknessLaw
  field: ThicknessField
  evidence: Evidence | null
  /** Share of years that left no candidate. */
  missed: number
  /** Candidates that are no boundary, per layer. */
  falseRate: number
  rounds: number
}

/** One part of the core between hiatuses, counted. */
export interface CountedPart extends SitePart {
  messages: Messages
}

const rounds = 12
/** Priors, each worth so many layers: spread of log thickness, missed years, unmarked beds, false candidates per layer. */
const prior = { layers: 12, sigma: 0.35, missed: 0.015, bedShare: 0.003, falseRate: 0.5 }

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
  const features = featuresOf(candidates, layers)
  let law = thicknessLaw(prior.sigma, prior.bedShare)
  let { missed, falseRate } = prior
  let evidence: Evidence | null = null
  let logRatio = features.prior
  let parts: CountedPart[] = []
  for (let round = 0; round < rounds; round++) {
    yield { stage: 'ladder', done: round, total: rounds }
    const logWeight = logRatio.map((value) => value + Math.log((1 - missed) / falseRate))
    parts = laySites(candidates, logWeight, ground, field, fixed, missed).map((part) => ({
      ...part,
      messages: forwardBackward(part.stretch, law),
    }))
    if (round === rounds - 1) break
    const belief = beliefs(candidates.position.length, parts)
    const found = layerStatistics(parts, law, field)
    law = thicknessLaw(found.sigma(prior.sigma, prior.layers), found.bedShare(prior.bedShare, 4 * prior.layers))
    followThickness(field, found.count, found.logSum)
    const { years, hidden, spurious } = tally(parts, belief)
    missed = Math.min(0.2, (hidden + prior.missed * 4 * prior.layers) / (years + 4 * prior.layers))
    falseRate = (spurious + prior.falseRate * prior.layers) / (field.coordinate(ground.rows) + prior.layers)
    ;({ evidence, logRatio } = learnEvidence(features, belief))
  }
  return { model: { law, field, evidence, missed, falseRate, rounds }, parts }
}

/** Posterior of each candidate; 0 for those no site stands for. */
export function beliefs(count: number, parts: CountedPart[]): Float64Array {
  const belief = new Float64Array(count)
  for (const { candidate, messages } of parts) {
    for (let i = 0; i < candidate.length; i++) if (candidate[i] >= 0) belief[candidate[i]] = messages.probability[i]
  }
  return belief
}

/** Expected numbers of all years, of years without a candidate in readable ground, and of candidates that are no years. */
function tally(parts: CountedPart[], belief: Float64Array) {
  let years = 0
  let hidden = 0
  for (const { kind, messages } of parts) {
    for (let i = 0; i < kind.length; i++) {
      if (kind[i] === 'unreadable') continue
      years += messages.probability[i]
      if (kind[i] === 'missed') hidden += messages.probability[i]
    }
  }
  let spurious = 0
  for (const one of belief) spurious += 1 - one
  return { years, hidden, spurious }
}
