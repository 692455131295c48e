import { checkInteger, checkSameLength, Fault } from '../check.ts'
import { medianOf } from './quickselect.ts'
import { atRow, type PerRow } from './runs.ts'

export interface LoessRules {
  /** Points that have a say in each fit: one number, or one for each point. */
  neighbours: PerRow
  /** Degree of the local polynomial. */
  degree: 1 | 2
  /** Rounds in which points far from the fit lose their weight. */
  robustRounds: number
  /** Points closer together than this are fitted at their first and last; straight lines between. In units of x. */
  delta: number
}

/**
 * Locally weighted regression: at each point a polynomial fitted to its nearest neighbours with tricube weights
 * (1 - u^3)^3, u the distance over that of the farthest neighbour; then, each round, with weights times the bisquare
 * (1 - (r / 6 MAD)^2)^2 of the residuals r (Cleveland 1979, J. Am. Stat. Assoc. 74, 829; delta after his LOWESS routine).
 * x sorted, ties allowed, all finite.
 */
export function loess(x: Float64Array, y: Float64Array, rules: LoessRules): Float64Array {
  checkSameLength('y', y, x.length)
  checkInteger('robust rounds', rules.robustRounds, 0, 20)
  const fit = new Float64Array(x.length)
  const robustness = new Float64Array(x.length).fill(1)
  for (let round = 0; round <= rules.robustRounds && x.length > 0; round++) {
    fitAll(x, y, robustness, rules, fit)
    if (round < rules.robustRounds && !weighResiduals(y, fit, robustness)) break
  }
  return fit
}

/** Fits points no closer than delta and draws straight lines between them. */
function fitAll(
  x: Float64Array,
  y: Float64Array,
  robustness: Float64Array,
  rules: LoessRules,
  fit: Float64Array,
): void {
  const count = x.length
  let first = 0
  let last = -1
  for (let at = 0; ;) {
    const neighbours = Math.max(rules.degree + 1, Math.min(count, Math.floor(atRow(rules.neighbours, at))))
    // The nearest neighbours are a window that slides along with the points.
    first = Math.min(first, count - neighbours)
    while (first > 0 && x[at] - x[first - 1] < x[first + neighbours - 1] - x[at]) first--
    while (first + neighbours < count && x[at] - x[first] > x[first + neighbours] - x[at]) first++
    fit[at] = fitAt(x, y, robustness, { first, neighbours, degree: rules.degree, at })
    for (let between = last + 1; last >= 0 && between < at; between++) {
      fit[between] = fit[last] + ((x[between] - x[last]) / (x[at] - x[last])) * (fit[at] - fit[last])
    }
    last = at
    if (last === count - 1) return
    // Equal x share one fit; then on to the farthest point within delta, or the next one.
    at = last + 1
    while (at < count && x[at] - x[last] <= rules.delta) {
      if (x[at] === x[last]) fit[(last = at)] = fit[at - 1]
      at++
    }
    if (last === count - 1) return
    at = Math.max(last + 1, at - 1)
  }
}

interface Place {
  first: number
  neighbours: number
  degree: 1 | 2
  at: number
}

function fitAt(x: Float64Array, y: Float64Array, robustness: Float64Array, place: Place): number {
  const { first, neighbours, at } = place
  const centre = x[at]
  const reach = Math.max(centre - x[first], x[first + neighbours - 1] - centre)
  const moments = new Float64Array(5)
  const products = new Float64Array(3)
  for (let i = first; i < first + neighbours; i++) {
    const distance = Math.abs(x[i] - centre)
    // Cleveland's limits: the farthest point has no weight, points all but at the centre the full one.
    if (distance > 0.999 * reach) continue
    const share = distance / reach
    const tricube = distance <= 0.001 * reach ? 1 : (1 - share * share * share) ** 3
    const weight = tricube * robustness[i]
    // In units of the reach, so that powers stay of one size.
    const t = reach > 0 ? (x[i] - centre) / reach : 0
    let power = weight
    for (let k = 0; k <= 2 * place.degree; k++, power *= t) {
      moments[k] += power
      if (k <= place.degree) products[k] += power * y[i]
    }
  }
  if (!(moments[0] > 0)) return y[at]
  // As in Cleveland's routine, points that spread by less than a thousandth of the whole range show no slope.
  const leastSpread = reach > 0 ? (0.001 * (x[x.length - 1] - x[0])) / reach : Infinity
  return place.degree === 1
    ? linearAtZero(moments, products, leastSpread)
    : quadraticAtZero(moments, products, leastSpread)
}

/** Value at 0 of the weighted straight line; the weighted mean where the points do not spread. */
function linearAtZero([m0, m1, m2]: Float64Array, [p0, p1]: Float64Array, leastSpread: number): number {
  const spread = m0 * m2 - m1 * m1
  return spread > (m0 * leastSpread) ** 2 ? (m2 * p0 - m1 * p1) / spread : p0 / m0
}

/** Value at 0 of the weighted parabola by Cramer's rule; the straight line where three points do not spread. */
function quadraticAtZero(moments: Float64Array, products: Float64Array, leastSpread: number): number {
  const [m0, m1, m2, m3, m4] = moments
  const [p0, p1, p2] = products
  const spread = m0 * (m2 * m4 - m3 * m3) - m1 * (m1 * m4 - m2 * m3) + m2 * (m1 * m3 - m2 * m2)
  if (!(spread > 1e-12 * m0 * m0 * m0)) return linearAtZero(moments, products, leastSpread)
  return (p0 * (m2 * m4 - m3 * m3) - m1 * (p1 * m4 - p2 * m3) + m2 * (p1 * m3 - p2 * m2)) / spread
}

/** Bisquare weights of the residuals; false where they are too small to tell points apart. */
function weighResiduals(y: Float64Array, fit: Float64Array, robustness: Float64Array): boolean {
  const size = Float32Array.from(y, (value, i) => Math.abs(value - fit[i]))
  const total = size.reduce((sum, value) => sum + value, 0)
  const limit = 6 * medianOf(size, size.length)
  if (!Number.isFinite(total)) throw new Fault('argument', 'y', NaN, 'y must be finite; it holds a gap')
  if (limit < (1e-7 * total) / y.length) return false
  for (let i = 0; i < y.length; i++) {
    const share = Math.abs(y[i] - fit[i]) / limit
    robustness[i] = share >= 0.999 ? 0 : share <= 0.001 ? 1 : (1 - share * share) ** 2
  }
  return true
}
