/**
 * How many years there are, when several people counted and none is right: a latent-class model of repeat counts.
 *
 * Classes, labels and conditional independence are those of Dawid & Skene 1979 (see latentClass.ts). What is added:
 * - Zero truncation: a year that everyone missed left no site. Years lie in each stratum as a Poisson number, and those
 *   seen by no one are drawn with the rest (data augmentation; Tanner & Wong 1987).
 * - Doubtful is a label of its own: it is said of true boundaries at one rate and of false ones at another.
 * - False marks: every counted year offers one place for a false boundary, and each counter falls for it with their own
 *   probability (the "doubling" of a year). This ties the false class down, which labels alone cannot.
 * - Unequal clarity: the log odds of missing a year are a_k + beta z + gamma_q + sigma u, with the site's spacing z, the
 *   quality class q and a clarity u ~ N(0, 1) of its own that no one has measured; those of calling it doubtful follow
 *   with the factor tau. Without u, years hard to see for everyone would be thought to be few.
 * What it cannot see: whatever all counters do alike. That is the systematic term, kept apart from all of this.
 *
 * Sampled by Gibbs with Metropolis steps for the log odds, from a seed: the same counts give the same figures.
 */
import { checkInteger, checkPositive } from '../check.ts'
import { seededRandom } from '../random.ts'
import type { Work } from '../work.ts'
import type { CounterCells } from './counterCells.ts'
import { defaultCounterPriors, type CounterPriors } from './counterPriors.ts'
import { CounterSampler } from './counterSampler.ts'

export interface SamplerOptions {
  priors: CounterPriors
  /** Draws kept, and draws before them while the steps are tuned. */
  draws: number
  burnIn: number
  seed: number
}

export const defaultSampler: SamplerOptions = { priors: defaultCounterPriors, draws: 2000, burnIn: 500, seed: 1 }

/** The posterior as draws. */
export interface CounterDraws {
  /** Total number of years, and how many of them no one marked, [draws]. */
  years: Float64Array
  missedByAll: Float64Array
  /** Share of the years that a counter looked at and missed, [counters][draws]. */
  missed: Float64Array[]
  /** False marks of a counter per year looked at, [counters][draws]. */
  false: Float64Array[]
  /** sigma, beta and tau, [draws]. */
  clarity: Float64Array
  spacing: Float64Array
  doubtFollows: Float64Array
  /** Mean probability of each cell's sites to be years, [cells]. */
  probability: Float64Array
  /** The same at some draws spread over the run, [kept x cells], row-major, and the odds p0 / (1 - p0) of a year of the cell's kind to be missed by all. */
  kept: number
  keptProbability: Float64Array
  keptUnseenOdds: Float64Array
}

const progressEvery = 100
const mostKept = 100

/** Draws from the posterior of the counts in these cells; yields progress. */
export function* sampleCounters(cells: CounterCells, options: SamplerOptions = defaultSampler): Work<CounterDraws> {
  const { draws, burnIn } = options
  checkInteger('draws', draws, 100)
  checkInteger('burn-in', burnIn, 100)
  checkPositive('claritySd', options.priors.claritySd)
  const sampler = new CounterSampler(cells, options.priors, seededRandom(options.seed))
  const result = emptyDraws(cells, draws)
  for (let step = -burnIn; step < draws; step++) {
    if ((step + burnIn) % progressEvery === 0) {
      yield { stage: 'counters', done: step + burnIn, total: draws + burnIn }
    }
    sampler.step()
    if (step < 0) sampler.tune(step + burnIn)
    else record(result, sampler, cells, step, draws)
  }
  return result
}

function emptyDraws(cells: CounterCells, draws: number): CounterDraws {
  const column = () => new Float64Array(draws)
  const kept = Math.min(mostKept, draws)
  return {
    years: column(),
    missedByAll: column(),
    missed: Array.from({ length: cells.counters }, column),
    false: Array.from({ length: cells.counters }, column),
    clarity: column(),
    spacing: column(),
    doubtFollows: column(),
    probability: new Float64Array(cells.cells.length),
    kept,
    keptProbability: new Float64Array(kept * cells.cells.length),
    keptUnseenOdds: new Float64Array(kept * cells.cells.length),
  }
}

function record(
  result: CounterDraws,
  sampler: CounterSampler,
  { cells, counters }: CounterCells,
  step: number,
  draws: number,
): void {
  result.years[step] = sampler.years()
  result.missedByAll[step] = sampler.missedByAll
  result.clarity[step] = sampler.sigma
  result.spacing[step] = sampler.beta
  result.doubtFollows[step] = sampler.tau
  for (let k = 0; k < counters; k++) {
    const rates = sampler.ratesOf(k)
    result.missed[k][step] = rates.missed
    result.false[k][step] = rates.false
  }
  for (let c = 0; c < cells.length; c++) result.probability[c] += sampler.probability[c] / draws
  const slot = Math.floor((step * result.kept) / draws)
  if (step > 0 && Math.floor(((step - 1) * result.kept) / draws) === slot) return
  result.keptProbability.set(sampler.probability, slot * cells.length)
  for (let c = 0; c < cells.length; c++) result.keptUnseenOdds[slot * cells.length + c] = sampler.unseenOdds(cells[c])
}
