import { bedFrom, bedMean, emptyStretch, recurrenceAt, survivalAt } from './thicknessLaw.ts'
import type { ThicknessLaw } from './thicknessLaw.ts'

/**
 * A stretch of core without a hiatus: sites that may be boundaries, in thickness coordinates (one unit = the local median
 * thickness, so that a layer's thickness is the difference of two coordinates wherever it lies).
 *
 * A set of sites s1 < s2 < … < sm is a ladder with the weight
 *   r(u_s1 - start) * prod w_s * prod f(u_s(k+1) - u_s(k)) * S(end - u_sm),
 * f the thickness law, S its survival, r = S / mean the stationary law of the first, cut layer; the empty set weighs
 * the probability that no boundary falls into the whole stretch. A ladder must hold every forced site.
 * This is a hidden semi-Markov model with explicit durations (Rabiner 1989, section IV D; Yu 2010, Artificial Intelligence 174).
 */
export interface Stretch {
  /** Thickness coordinate of each site, not decreasing, [sites]. */
  u: Float64Array
  /** How many times likelier what is seen at the site is if it is a boundary than if it is none, [sites]. */
  weight: Float64Array
  /** 1: the site is a boundary for certain, [sites]. */
  forced: Uint8Array
  start: number
  end: number
}

/** Sums over all ladders of the sites passed so far that end at each site: value * exp(scale), both [sites]. */
export interface Sweep {
  value: Float64Array
  scale: Float64Array
}

export interface Messages {
  /** Young to old, the site's own weight included. */
  down: Sweep
  /** Old to young, the site's own weight included. */
  up: Sweep
  /** Log of the sum over all ladders. */
  logTotal: number
  /** Posterior probability of each site, [sites]. */
  probability: Float64Array
}

type EndLaw = (law: ThicknessLaw, distance: number) => number

const tooLarge = 1e100
const tooSmall = 1e-100

/**
 * One pass of the forward recursion. The exponential tail of the law lets all sites further back than its table be
 * carried in one decaying sum; values are rescaled as they leave the range of doubles, so length does not matter.
 */
function sweep({ u, weight, forced, start }: Stretch, law: ThicknessLaw, atStart: EndLaw): Sweep {
  const n = u.length
  const value = new Float64Array(n)
  const scale = new Float64Array(n)
  const { density, longest, perUnit } = law
  let shift = 0
  // Bed tail over the sites [floor, entered), seen from the previous site.
  let tail = 0
  let entered = 0
  // No ladder may jump over a forced site: sites before `floor` are out of reach.
  let floor = 0
  let mass = 0
  let before = start
  for (let j = 0; j < n; j++) {
    const here = u[j]
    const decay = Math.exp((before - here) / bedMean)
    tail *= decay
    mass *= decay
    before = here
    while (entered < j && here - u[entered] > longest) {
      tail += value[entered] * bedTail(law, here - u[entered])
      entered++
    }
    let sum = tail
    if (floor === 0) sum += Math.exp(Math.log(atStart(law, here - start)) - shift)
    for (let i = j - 1; i >= entered; i--) {
      const at = (here - u[i]) * perUnit
      const k = Math.floor(at)
      sum += value[i] * (density[k] + (at - k) * (density[k + 1] - density[k]))
    }
    value[j] = sum * weight[j]
    scale[j] = shift
    mass += value[j]
    if (forced[j] === 1) {
      tail = 0
      entered = j
      // Site 0 may itself be forced; the marker only has to differ from 'nothing forced yet'.
      floor = j + 1
      mass = value[j]
    }
    if (mass > tooLarge || (mass < tooSmall && mass > 0)) {
      const factor = 1 / mass
      shift += Math.log(mass)
      for (let i = entered; i <= j; i++) {
        value[i] *= factor
        scale[i] = shift
      }
      tail *= factor
      mass = 1
    }
  }
  return { value, scale }
}

/** What the law's exponential tail gives a gap longer than its table. */
export function bedTail(law: ThicknessLaw, distance: number): number {
  return (law.bedShare * Math.exp(-(distance - bedFrom) / bedMean)) / bedMean
}

function reversed({ u, weight, forced, start, end }: Stretch): Stretch {
  return {
    u: u.map((_, i) => -u[u.length - 1 - i]),
    weight: weight.toReversed(),
    forced: forced.toReversed(),
    start: -end,
    end: -start,
  }
}

/** Forward-backward: the posterior probability of every site. */
export function forwardBackward(stretch: Stretch, law: ThicknessLaw): Messages {
  const down = sweep(stretch, law, recurrenceAt)
  const back = sweep(reversed(stretch), law, survivalAt)
  const up = { value: back.value.reverse(), scale: back.scale.reverse() }
  const logTotal = totalOf(stretch, law, down)
  const probability = new Float64Array(stretch.u.length)
  for (let i = 0; i < probability.length; i++) {
    const both = (down.value[i] * up.value[i]) / stretch.weight[i]
    probability[i] = both > 0 ? Math.min(1, both * Math.exp(down.scale[i] + up.scale[i] - logTotal)) : 0
  }
  return { down, up, logTotal, probability }
}

function totalOf({ u, forced, start, end }: Stretch, law: ThicknessLaw, down: Sweep): number {
  const n = u.length
  const last = forced.lastIndexOf(1)
  const empty = last < 0 ? emptyStretch(law, end - start) : 0
  const reference = n > 0 ? down.scale[n - 1] : 0
  let sum = empty > 0 ? Math.exp(Math.log(empty) - reference) : 0
  for (let i = n - 1; i >= Math.max(0, last); i--) {
    // In logarithms, since either factor alone may leave the range of doubles across a long empty stretch.
    sum += Math.exp(Math.log(down.value[i]) + down.scale[i] - reference + Math.log(survivalAt(law, end - u[i])))
  }
  return Math.log(sum) + reference
}
