import type { Stretch } from './stretch.ts'
import { bedFrom, bedMean } from './thicknessLaw.ts'
import type { ThicknessLaw } from './thicknessLaw.ts'

/**
 * What lies inside a year without being its boundary: none, one, two or more laminae, and where; a second lamina of the year
 * stands there in most years or in none, and at much the same share of the year.
 */
export interface InnerLaw {
  /** Mean number of laminae a year. */
  rate: number
  /** For 0, 1, 2, 3 or more laminae: their probability times k! / rate^k, which is e^(-rate) for a Poisson number. */
  number: Float64Array
  /** Density of their places over equal steps of the year's thickness from its young to its old boundary, mean 1. */
  phase: Float64Array
}

/** Steps in which the phase of inner laminae is held. */
export const phaseSteps = 16
/** Numbers of inner laminae held apart: 0, 1, 2, and 3 or more. */
export const numberSteps = 4

/** The laws of a year: how thick it is, and what it shows inside. */
export interface YearLaw {
  thickness: ThicknessLaw
  inner: InnerLaw
  /** Power to which the weight of a year is raised: 1 is the model as it stands, less than 1 trusts it less. */
  trust: number
}

export function evenInnerLaw(rate: number): InnerLaw {
  return {
    rate,
    number: new Float64Array(numberSteps).fill(Math.exp(-rate)),
    phase: new Float64Array(phaseSteps).fill(1),
  }
}

/**
 * Weights of pairs of sites as the two boundaries of one year,
 *   g(i, j) = [f(d) number(k) prod over the sites k between that show something: phase((u_k - u_i) / d) / d]^trust,   d = u_j - u_i,
 * f held against the thickness expected below site i,
 * for all j from i + 1 while d stays within the law's table and no forced site is jumped over. Pairs of site i are
 * weight[offset[i]] (for j = i + 1) to weight[offset[i + 1] - 1].
 */
export interface LayerPairs {
  offset: Int32Array
  weight: Float64Array
}

export function layerPairs({ u, forced, shows, expected }: Stretch, { thickness, inner, trust }: YearLaw): LayerPairs {
  const n = u.length
  const { density, longest, perUnit } = thickness
  const offset = new Int32Array(n + 1)
  for (let i = 0, last = 0; i < n; i++) {
    last = Math.max(last, i)
    while (last + 1 < n && u[last + 1] - u[i] <= longest && !(forced[last] === 1 && last > i)) last++
    offset[i + 1] = offset[i] + last - i
  }
  const weight = new Float64Array(offset[n])
  const steps = inner.phase.length
  const seen = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    let inside = 0
    const shrink = Math.exp(-expected[i])
    const jacobian = Math.exp(-expected[i])
    for (let at = offset[i], j = i + 1; at < offset[i + 1]; at++, j++) {
      const d = u[j] - u[i]
      // Thickness over what is expected here; the density is that of d, hence the factor.
      const cell = Math.min(d * shrink, longest) * perUnit
      const k = Math.floor(cell)
      let g =
        jacobian *
        inner.number[Math.min(numberSteps - 1, inside)] *
        (density[k] + (cell - k) * (density[k + 1] - density[k]))
      if (g > 0) {
        for (let s = 0; s < inside; s++) g *= inner.phase[Math.min(steps - 1, Math.floor((seen[s] * steps) / d))] / d
      }
      weight[at] = trust === 1 ? g : g ** trust
      if (shows[j] === 1) seen[inside++] = d
    }
  }
  return { offset, weight }
}

/** What the law gives a layer longer than its table: an unmarked bed, with inner laminae at an even rate over its length. */
export function bedTail({ thickness, inner, trust }: YearLaw, distance: number): number {
  return ((thickness.bedShare * Math.exp(-(distance - bedFrom) / bedMean - inner.rate)) / bedMean) ** trust
}

/** Distance over which that tail falls by a factor of e. */
export function tailLength({ trust }: YearLaw): number {
  return bedMean / trust
}
