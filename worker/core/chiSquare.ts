/** Chi-square probabilities by the regularised incomplete gamma function. */
import { checkAtLeast, checkPositive } from '../check.ts'
import { logGamma } from './incompleteBeta.ts'

/** P(X > x) of a chi-square variable: Q(degrees / 2, x / 2) (Abramowitz & Stegun 1964, 26.4.19). */
export function chiSquareBeyond(x: number, degrees: number): number {
  checkAtLeast('chi-square', x, 0)
  checkPositive('degrees of freedom', degrees)
  return upperGamma(degrees / 2, x / 2)
}

/** The value that a chi-square variable exceeds with the given probability, by bisection. */
export function chiSquareCritical(beyond: number, degrees: number): number {
  let low = 0
  let high = degrees + 10
  while (chiSquareBeyond(high, degrees) > beyond) high *= 2
  for (let step = 0; step < 200 && high - low > 1e-13 * high; step++) {
    const middle = (low + high) / 2
    if (chiSquareBeyond(middle, degrees) > beyond) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** Q(a, x): by the series of P below a + 1 (A&S 6.5.29), by the continued fraction above (A&S 6.5.31, modified Lentz). */
function upperGamma(a: number, x: number): number {
  if (x === 0) return 1
  const front = Math.exp(a * Math.log(x) - x - logGamma(a))
  if (x < a + 1) {
    let term = 1 / a
    let sum = term
    for (let n = 1; n < 10_000 && term > sum * 1e-17; n++) {
      term *= x / (a + n)
      sum += term
    }
    return Math.max(0, 1 - front * sum)
  }
  let b = x + 1 - a
  let c = 1e300
  let d = 1 / b
  let fraction = d
  for (let n = 1; n < 10_000; n++) {
    const an = -n * (n - a)
    b += 2
    d = 1 / (an * d + b)
    c = b + an / c
    fraction *= c * d
    if (Math.abs(c * d - 1) < 1e-16) break
  }
  return front * fraction
}
