import type { Work } from '../work.ts'
import type { Candidates } from './candidates.ts'
import {
  featuresOf,
  firstReference,
  learnEvidence,
  logOddsOf,
  localReference,
  logPrior,
  looksOf,
  startEvidence,
} from './ladderEvidence.ts'
import type { Columns, Evidence } from './ladderEvidence.ts'
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
  /** How much of a layer's departure from the local median the next one keeps. */
  memory: number
}

/** One part of the core between hiatuses, counted. */
export interface CountedPart extends SitePart {
  messages: Messages
}

/** Rounds of EM from each start, and from the best of them. */
const trialRounds = 5
const finalRounds = 8
/**
 * Starts: the thickness found beforehand, half and twice of it, and whether laminae weaker than their neighbours are first
 * taken for years of their own or for second laminae of a year (the constant of the evidence).
 */
const starts = [
  { scale: 1, constant: 4 },
  { scale: 1, constant: 1.5 },
  { scale: 2, constant: 1.5 },
  { scale: 0.5, constant: 4 },
]
/**
 * Power of the fitted model's weights in what is reported. A model fitted to one core is surer of itself than its errors on
 * drawn cores allow: it knows neither its own misfit nor that its parameters were read from the same layers. Raising the
 * likelihood to a power below 1 is the coarsened posterior of Miller & Dunson (2019, JASA 114, 1113); this power made the
 * probabilities of drawn cores true to their name.
 */
const trust = 0.65
/** Priors, each worth so many layers: spread of log thickness, missed years, unmarked beds, inner laminae per layer. */
const prior = { layers: 12, sigma: 0.35, missed: 0.015, bedShare: 0.003, inner: 0.3, memory: 0.3 }

/** What the fit works on. */
interface Task {
  candidates: Candidates
  ground: Ground
  fixed: Float64Array
}

/** Present parameters, and what follows from them. */
interface State extends LadderModel {
  /** Looks of the candidates against the usual ones around them. */
  features: Columns
  /** Log thickness over the local median expected below each candidate, [candidates]. */
  expected: Float64Array
}

/**
 * Expectation-maximisation (Dempster, Laird & Rubin 1977): the ladder's probabilities under the present parameters, then the
 * parameters that fit them, a fixed number of rounds, from several starts; the start that explains the candidates best is
 * taken to its end.
 */
export function* fitLadder(
  task: Task,
  thickness: (position: number) => number,
): Work<{ model: LadderModel; parts: CountedPart[] }> {
  const total = starts.length * trialRounds + finalRounds
  let best: State | null = null
  let most = -Infinity
  let done = 0
  for (const { scale, constant } of starts) {
    const state = begin(task, (position) => scale * thickness(position), constant)
    let parts = expect(task, state)
    for (let round = 0; round < trialRounds; round++) {
      yield { stage: 'ladder', done: done++, total }
      improve(task, state, parts)
      parts = expect(task, state)
    }
    const evidence = logEvidence(task, state, parts)
    if (best === null || evidence > most) [best, most] = [state, evidence]
  }
  const state = best!
  let parts = expect(task, state)
  for (let round = 0; round < finalRounds; round++) {
    yield { stage: 'ladder', done: done++, total }
    improve(task, state, parts)
    parts = expect(task, state)
  }
  state.law = { ...state.law, trust }
  parts = expect(task, state)
  const { law, field, evidence, missed, memory } = state
  return { model: { law, field, evidence, missed, memory }, parts }
}

function looksIn({ candidates }: Task, field: ThicknessField): Columns {
  return looksOf(
    candidates,
    candidates.peak.map((peak) => field.medianAt(peak)),
  )
}

function begin(task: Task, thickness: (position: number) => number, constant: number): State {
  const field = new ThicknessField(task.ground, thickness)
  const looks = looksIn(task, field)
  return {
    field,
    law: {
      thickness: thicknessLaw(prior.sigma, prior.bedShare),
      inner: evenInnerLaw(prior.inner),
      trust: 1,
    },
    missed: prior.missed,
    memory: 0,
    expected: new Float64Array(task.candidates.position.length),
    evidence: startEvidence(constant),
    features: featuresOf(looks, firstReference(looks, field.coordinate(task.ground.rows))),
  }
}

function expect(
  { candidates, ground, fixed }: Task,
  { features, evidence, field, law, missed, expected }: State,
): CountedPart[] {
  const logWeight = logOddsOf(features, evidence)
  return laySites(
    candidates,
    logWeight.map((one) => law.trust * one),
    ground,
    field,
    fixed,
    missed ** law.trust,
    expected,
  ).map((part) => ({
    ...part,
    messages: forwardBackward(part.stretch, law),
  }))
}

function improve(task: Task, state: State, parts: CountedPart[]): void {
  const belief = beliefs(task.candidates.position.length, parts)
  const found = layerStatistics(parts, state.law, state.field, task.candidates.position.length)
  state.law = {
    thickness: thicknessLaw(found.sigma(prior.sigma, prior.layers), found.bedShare(prior.bedShare, 4 * prior.layers)),
    inner: found.inner(prior.inner, prior.layers),
    trust: 1,
  }
  const memory = found.memory(prior.memory, found.sigma(prior.sigma, prior.layers), prior.layers)
  state.memory = memory
  state.expected = found.above.map((one) => memory * Math.max(-1, Math.min(1, one)))
  followThickness(state.field, found.count, found.logSum)
  const { years, hidden } = tally(parts)
  state.missed = Math.min(0.2, (hidden + prior.missed * 4 * prior.layers) / (years + 4 * prior.layers))
  const looks = looksIn(task, state.field)
  state.features = featuresOf(looks, localReference(looks, belief))
  state.evidence = learnEvidence(state.features, belief, state.evidence)
}

/**
 * Log of the probability of the candidates' places and looks under a state, up to what all states share: the ladders' sum, times for
 * each candidate its density as an inner lamina, (N / layers) P(no year | looks) p(looks) / local thickness.
 */
function logEvidence(
  { candidates, ground }: Task,
  { features, evidence, field, law }: State,
  parts: CountedPart[],
): number {
  const odds = logOddsOf(features, evidence)
  let layers = 1
  let log = logPrior(evidence)
  for (const { messages } of parts) {
    log += messages.logTotal
    for (const one of messages.probability) layers += one
  }
  const density = Math.log(candidates.position.length / layers)
  for (const { candidate } of parts) {
    for (const i of candidate) {
      if (i < 0) continue
      log += density - Math.log1p(Math.exp(odds[i])) - Math.log(field.medianAt(candidates.position[i]))
    }
  }
  // Ground that no layer holds (long beds, ends) must not take in candidates for nothing: there they fall at the same rate.
  const held = layers * law.thickness.mean
  return (
    log - (law.inner.rate + candidates.position.length / layers - 1) * Math.max(0, field.coordinate(ground.rows) - held)
  )
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
