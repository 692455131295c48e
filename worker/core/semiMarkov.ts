import { bedTail, layerPairs, tailLength } from './layerPairs.ts'
import type { LayerPairs, YearLaw } from './layerPairs.ts'
import type { Stretch } from './stretch.ts'
import { emptyStretch, recurrenceAt, survivalAt } from './thicknessLaw.ts'

/**
 * A stretch of core without a hiatus: sites that may be boundaries, in thickness coordinates (one unit = the local median
 * thickness, so that a layer's thickness is the difference of two coordinates wherever it lies).
 *
 * A set of sites s1 < s2 < … < sm is a ladder with the weight
 *   r(u_s1 - start) * prod w_s * prod g(s_k, s_(k+1)) * S(end - u_sm),
 * g the weight of a pair as one year (layerPairs.ts; beyond the table of the thickness law, its tail), S the survival of the
 * thickness law, r = S / mean the stationary law of the first, cut layer; the empty set weighs the probability that no
 * boundary falls into the whole stretch. A ladder must hold every forced site.
 * This is a hidden semi-Markov model with explicit durations (Rabiner 1989, section IV D; Yu 2010, Artificial Intelligence 174).
 */
export type { Stretch }

/** Sums over all ladders of the sites to one side that reach a site: value * exp(scale), both [sites]. */
export interface Sweep {
  value: Float64Array
  scale: Float64Array
}

export interface Messages {
  pairs: LayerPairs
  /** Young to old, the site's own weight included. */
  down: Sweep
  /** Old to young, the site's own weight included. */
  up: Sweep
  /** Log of the sum over all ladders. */
  logTotal: number
  /** Posterior probability of each site, [sites]. */
  probability: Float64Array
}

/** Forward-backward: the posterior probability of every site. */
export function forwardBackward(stretch: Stretch, law: YearLaw): Messages {
  const pairs = layerPairs(stretch, law)
  const down = sweepDown(stretch, law, pairs)
  const up = sweepUp(stretch, law, pairs)
  const logTotal = totalOf(stretch, law, down)
  const probability = new Float64Array(stretch.u.length)
  for (let i = 0; i < probability.length; i++) {
    const both = (down.value[i] * up.value[i]) / stretch.weight[i]
    probability[i] = both > 0 ? Math.min(1, both * Math.exp(down.scale[i] + up.scale[i] - logTotal)) : 0
  }
  return { pairs, down, up, logTotal, probability }
}

function sweepDown({ u, weight, forced, start }: Stretch, law: YearLaw, { offset, weight: pair }: LayerPairs): Sweep {
  const n = u.length
  const run = new Running(n, law)
  const { value } = run
  let entered = 0
  let open = true
  for (let j = 0; j < n; j++) {
    run.advance(j > 0 ? u[j] - u[j - 1] : 0)
    for (; entered < j && u[j] - u[entered] > law.thickness.longest; entered++) run.enter(entered, u[j] - u[entered])
    let sum = run.tail
    if (open) sum += run.scaled(recurrenceAt(law.thickness, u[j] - start))
    for (let i = entered; i < j; i++) sum += value[i] * pair[offset[i] + j - i - 1]
    run.put(j, sum * weight[j])
    if (forced[j] === 1) {
      run.forget(j)
      entered = j
      open = false
    }
    run.rescale(entered, j)
  }
  return run
}

function sweepUp({ u, weight, forced, end }: Stretch, law: YearLaw, { offset, weight: pair }: LayerPairs): Sweep {
  const n = u.length
  const run = new Running(n, law)
  const { value } = run
  let entered = n - 1
  let open = true
  for (let i = n - 1; i >= 0; i--) {
    run.advance(i < n - 1 ? u[i + 1] - u[i] : 0)
    for (; entered > i && u[entered] - u[i] > law.thickness.longest; entered--) run.enter(entered, u[entered] - u[i])
    let sum = run.tail
    if (open) sum += run.scaled(survivalAt(law.thickness, end - u[i]))
    for (let j = i + 1, at = offset[i]; j <= entered; j++, at++) sum += pair[at] * value[j]
    run.put(i, sum * weight[i])
    if (forced[i] === 1) {
      run.forget(i)
      entered = i
      open = false
    }
    run.rescale(i, entered)
  }
  return run
}

const tooLarge = 1e100
const tooSmall = 1e-100

/**
 * The state of a sweep. The exponential tail of the thickness law lets all sites further back than its table be carried in
 * one decaying sum; values are rescaled as they leave the range of doubles, so that length does not matter.
 */
class Running implements Sweep {
  readonly value: Float64Array
  readonly scale: Float64Array
  /** Sum of what the sites beyond the table give the present one. */
  tail = 0
  private mass = 0
  private shift = 0

  constructor(
    sites: number,
    private readonly law: YearLaw,
  ) {
    this.value = new Float64Array(sites)
    this.scale = new Float64Array(sites)
  }

  advance(step: number): void {
    const decay = Math.exp(-step / tailLength(this.law))
    this.tail *= decay
    this.mass *= decay
  }

  enter(site: number, distance: number): void {
    this.tail += this.value[site] * bedTail(this.law, distance)
  }

  /** A weight of the ends, in the present scale; by logarithms, since either factor alone may leave the range of doubles. */
  scaled(weight: number): number {
    return Math.exp(Math.log(weight) - this.shift)
  }

  put(site: number, value: number): void {
    this.value[site] = value
    this.scale[site] = this.shift
    this.mass += value
  }

  /** No ladder jumps over a forced site: what came before it is out of reach. */
  forget(site: number): void {
    this.tail = 0
    this.mass = this.value[site]
  }

  /** Brings the sites still in reach back to the middle of the range of doubles. */
  rescale(from: number, to: number): void {
    if (!(this.mass > tooLarge || (this.mass < tooSmall && this.mass > 0))) return
    const factor = 1 / this.mass
    this.shift += Math.log(this.mass)
    for (let i = from; i <= to; i++) {
      this.value[i] *= factor
      this.scale[i] = this.shift
    }
    this.tail *= factor
    this.mass = 1
  }
}

function totalOf({ u, forced, start, end }: Stretch, { thickness }: YearLaw, down: Sweep): number {
  const n = u.length
  const last = forced.lastIndexOf(1)
  const empty = last < 0 ? emptyStretch(thickness, end - start) : 0
  const reference = n > 0 ? down.scale[n - 1] : 0
  let sum = Math.exp(Math.log(empty) - reference)
  for (let i = n - 1; i >= Math.max(0, last); i--) {
    sum += Math.exp(Math.log(down.value[i]) + down.scale[i] - reference + Math.log(survivalAt(thickness, end - u[i])))
  }
  return Math.log(sum) + reference
}
