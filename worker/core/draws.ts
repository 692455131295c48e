/** Draws from the usual distributions, from seeded uniform and normal numbers; exact, whatever their size. */
import type { Random } from '../random.ts'

/** Gamma with the given shape and unit scale (Marsaglia & Tsang 2000, ACM TOMS 26, 363). */
export function drawGamma(random: Random, shape: number): number {
  // Below 1, by their note: Gamma(a) = Gamma(a + 1) U^(1/a).
  if (shape < 1) return drawGamma(random, shape + 1) * (1 - random.uniform()) ** (1 / shape)
  const d = shape - 1 / 3
  const c = 1 / Math.sqrt(9 * d)
  for (;;) {
    const x = random.normal()
    const v = (1 + c * x) ** 3
    if (v <= 0) continue
    const u = 1 - random.uniform()
    if (Math.log(u) < 0.5 * x * x + d - d * v + d * Math.log(v)) return d * v
  }
}

/** Beta(a, b) as a ratio of gamma variables. */
export function drawBeta(random: Random, a: number, b: number): number {
  const x = drawGamma(random, a)
  return x / (x + drawGamma(random, b))
}

/** Below this many expected successes or events a plain loop is fastest. */
const few = 12

/** Number of successes in n trials. Many trials are halved by the median-like order statistic (Ahrens & Dieter 1974, Computing 12, 223). */
export function drawBinomial(random: Random, n: number, p: number): number {
  if (!(n > 0 && p > 0)) return 0
  if (p >= 1) return n
  if (p > 0.5) return n - drawBinomial(random, n, 1 - p)
  let successes = 0
  let trials = n
  let share = p
  while (trials * share > few) {
    const middle = 1 + (trials >> 1)
    const value = drawBeta(random, middle, trials + 1 - middle)
    if (value <= share) {
      successes += middle
      trials -= middle
      share = (share - value) / (1 - value)
    } else {
      trials = middle - 1
      share /= value
    }
  }
  return successes + fewSuccesses(random, trials, share)
}

/** Jumps from success to success by geometric waiting times. */
function fewSuccesses(random: Random, trials: number, share: number): number {
  if (!(share > 0)) return 0
  if (share >= 1) return trials
  const scale = Math.log1p(-share)
  let successes = 0
  for (let at = 0; ; successes++) {
    at += Math.floor(Math.log(1 - random.uniform()) / scale) + 1
    if (at > trials) return successes
  }
}

/** Poisson; large means are split by the waiting time of an early event (Ahrens & Dieter 1974, Computing 12, 223). */
export function drawPoisson(random: Random, mean: number): number {
  let events = 0
  let left = mean
  while (left > few) {
    const early = Math.floor((7 / 8) * left)
    const time = drawGamma(random, early)
    if (time > left) return events + drawBinomial(random, early - 1, left / time)
    events += early
    left -= time
  }
  let product = 1 - random.uniform()
  for (const floor = Math.exp(-left); product > floor; events++) product *= 1 - random.uniform()
  return events
}
