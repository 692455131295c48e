/** Beyond this many standard deviations the tail is below 1e-15 and left out. */
const furthest = 8

/**
 * Cumulative standard normal distribution, to 1e-14: 1/2 + phi(x) (x + x^3 / 3 + x^5 / (3 5) + …) (Marsaglia 2004, Journal
 * of Statistical Software 11(4)).
 */
export function normalCdf(x: number): number {
  if (!(Math.abs(x) < furthest)) return x > 0 ? 1 : x < 0 ? 0 : NaN
  let term = x
  let sum = x
  for (let odd = 3, before = NaN; sum !== before; odd += 2) {
    before = sum
    term *= (x * x) / odd
    sum += term
  }
  return 0.5 + sum * Math.exp(-0.5 * x * x - 0.5 * Math.log(2 * Math.PI))
}
