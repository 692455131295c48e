/**
 * The regularised incomplete beta function, its inverse, and Student's t, for intervals of rates and of repeat counts.
 * Written here because no package was right throughout its range; tested against values made with mpmath.
 */
import { checkPositive, checkWithin } from '../check.ts'

/** Bernoulli-number terms of Stirling's series, B_2k / (2k (2k - 1)) (Abramowitz & Stegun 1964, 6.1.41). */
const stirling = [1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156]
/** Stirling's series is good to 1e-15 from here on; smaller arguments are raised by the recurrence. */
const stirlingFrom = 12

/** Stirling's correction: log Gamma(x) - [(x - 1/2) log x - x + log(2 pi) / 2], for x >= 12. */
function stirlingCorrection(x: number): number {
  const square = 1 / (x * x)
  let sum = 0
  for (let k = stirling.length - 1; k >= 0; k--) sum = sum * square + stirling[k]
  return sum / x
}

/** log Gamma(x) for x > 0. */
export function logGamma(x: number): number {
  checkPositive('x', x)
  let shift = 1
  let raised = x
  while (raised < stirlingFrom) {
    shift *= raised
    raised += 1
  }
  const series = (raised - 0.5) * Math.log(raised) - raised + 0.5 * Math.log(2 * Math.PI) + stirlingCorrection(raised)
  return series - Math.log(shift)
}

/** log(1 + u) - u without loss of digits near 0. */
function logBend(u: number): number {
  if (Math.abs(u) > 0.1) return Math.log1p(u) - u
  let sum = 0
  for (let k = 17; k >= 2; k--) sum = u * ((k % 2 === 0 ? -1 : 1) / k + sum)
  return u * sum
}

/** log of x^a (1 - x)^b / B(a, b); for large a and b by Stirling's series, where differences of logGamma lose digits. */
function logBetaKernel(x: number, a: number, b: number): number {
  if (a < stirlingFrom || b < stirlingFrom) {
    return logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)
  }
  const sum = a + b
  const mode = a / sum
  // a log(x / mode) + b log((1 - x) / (1 - mode)); the linear terms of the two logarithms cancel, so they are left out.
  const exponent = a * logBend((x - mode) / mode) + b * logBend((mode - x) / (1 - mode))
  const correction = stirlingCorrection(sum) - stirlingCorrection(a) - stirlingCorrection(b)
  return exponent + 0.5 * Math.log((a * b) / (2 * Math.PI * sum)) + correction
}

/** Continued fraction of the incomplete beta function (DLMF 8.17.22) by the modified Lentz method (Thompson & Barnett 1986). */
function betaFraction(x: number, a: number, b: number): number {
  const tiny = 1e-300
  let c = 1
  let d = 1 / nonZero(1 - ((a + b) * x) / (a + 1), tiny)
  let value = d
  const most = 200 + 20 * Math.ceil(Math.sqrt(Math.max(a, b)))
  for (let m = 1; m <= most; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m))
    d = 1 / nonZero(1 + even * d, tiny)
    c = nonZero(1 + even / c, tiny)
    value *= d * c
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1))
    d = 1 / nonZero(1 + odd * d, tiny)
    c = nonZero(1 + odd / c, tiny)
    value *= d * c
    if (Math.abs(d * c - 1) < 1e-16) break
  }
  return value
}

const nonZero = (value: number, tiny: number) => (Math.abs(value) < tiny ? tiny : value)

/** Regularised incomplete beta function I_x(a, b) for a, b > 0 and x from 0 to 1: P(X <= x) of a Beta(a, b) variable. */
export function incompleteBeta(x: number, a: number, b: number): number {
  checkWithin('x', x, 0, 1)
  checkPositive('a', a)
  checkPositive('b', b)
  if (x === 0 || x === 1) return x
  // The fraction converges fast left of the mean; right of it, use I_x(a, b) = 1 - I_(1-x)(b, a).
  if (x > (a + 1) / (a + b + 2)) return 1 - (Math.exp(logBetaKernel(x, a, b)) / b) * betaFraction(1 - x, b, a)
  return (Math.exp(logBetaKernel(x, a, b)) / a) * betaFraction(x, a, b)
}

/** The x with I_x(a, b) = p, by bisection to the last bit: no derivative, no starting value that could fail. */
export function inverseIncompleteBeta(p: number, a: number, b: number): number {
  checkWithin('p', p, 0, 1)
  if (p === 0 || p === 1) return p
  let low = 0
  let high = 1
  for (let step = 0; step < 1100; step++) {
    const middle = (low + high) / 2
    if (middle === low || middle === high) break
    if (incompleteBeta(middle, a, b) < p) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** Quantile of Student's t with the given degrees of freedom, from the incomplete beta function (DLMF 8.17.1, x = v / (v + t^2)). */
export function studentQuantile(p: number, degrees: number): number {
  checkWithin('p', p, 0, 1)
  checkPositive('degrees of freedom', degrees)
  if (p === 0.5) return 0
  const tail = 2 * Math.min(p, 1 - p)
  const x = inverseIncompleteBeta(tail, degrees / 2, 0.5)
  const t = Math.sqrt((degrees * (1 - x)) / x)
  return p < 0.5 ? -t : t
}
