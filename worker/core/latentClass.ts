/**
 * What each observer's labels are worth when no one knows the truth: the latent-class model of Dawid & Skene 1979,
 * Applied Statistics 28, 20-28, fitted by EM from several starts, because EM climbs to the nearest hill only.
 */
import { checkAtLeast, checkInteger, checkSameLength, Fault } from '../check.ts'
import { seededRandom } from '../random.ts'

/** How often each observer gave each label to each item. */
export interface Readings {
  items: number
  observers: number
  /** Labels are also the classes: label l says "I think it is class l". */
  labels: number
  /** n_il(k), [items x observers x labels], row-major; an observer who did not look has zeros. */
  times: Float64Array
  /** How many items share these readings, [items]; null: one each. */
  weight: Float64Array | null
}

export interface LatentClassFit {
  /** p_j, [classes]. */
  prevalence: Float64Array
  /** pi_jl(k) = P(observer k says l | true class j), [observers x classes x labels], row-major. */
  rates: Float64Array
  /** T_ij, [items x classes], row-major. */
  posterior: Float64Array
  logLikelihood: number
  /** Log-likelihood after the first step, and how many steps it took. */
  firstLogLikelihood: number
  iterations: number
}

export interface LatentClassFits {
  best: LatentClassFit
  /** Log-likelihood that each start reached, by its name. */
  starts: { name: string; logLikelihood: number }[]
}

/** EM stops when no posterior moves by more than this, or after the given number of steps. */
const stillness = 1e-13
const mostIterations = 20_000
const randomStarts = 4

/** Fits from the share of readings, from the majority of readings and from seeded shakings of the share; the most likely fit wins. */
export function latentClassFits(readings: Readings, seed = 1): LatentClassFits {
  checkReadings(readings)
  const share = shareStart(readings)
  const starts: [string, Float64Array][] = [
    ['share of readings', share],
    ['majority of readings', majorityStart(readings, share)],
  ]
  const random = seededRandom(seed)
  for (let n = 1; n <= randomStarts; n++)
    starts.push([`shaken ${n}`, shakenStart(readings, share, () => random.uniform())])
  const fits = starts.map(([name, start]) => ({ name, fit: fitFrom(readings, start) }))
  const best = fits.reduce((a, b) => (b.fit.logLikelihood > a.fit.logLikelihood + 1e-9 ? b : a))
  return { best: best.fit, starts: fits.map(({ name, fit }) => ({ name, logLikelihood: fit.logLikelihood })) }
}

/** Dawid & Skene's start: T_ij is the share of all readings of item i that say j. */
export function shareStart({ items, observers, labels, times }: Readings): Float64Array {
  const start = new Float64Array(items * labels)
  for (let i = 0; i < items; i++) {
    let all = 0
    for (let k = 0; k < observers; k++) {
      for (let l = 0; l < labels; l++) {
        const n = times[(i * observers + k) * labels + l]
        start[i * labels + l] += n
        all += n
      }
    }
    for (let l = 0; l < labels; l++) start[i * labels + l] = all > 0 ? start[i * labels + l] / all : 1 / labels
  }
  return start
}

/** Every item wholly in its most frequent label; ties share. */
export function majorityStart({ items, labels }: Readings, share: Float64Array): Float64Array {
  const start = new Float64Array(items * labels)
  for (let i = 0; i < items; i++) {
    const row = share.subarray(i * labels, (i + 1) * labels)
    const most = Math.max(...row)
    const winners = row.reduce((count, value) => count + (value === most ? 1 : 0), 0)
    for (let l = 0; l < labels; l++) start[i * labels + l] = row[l] === most ? 1 / winners : 0
  }
  return start
}

function shakenStart({ items, labels }: Readings, share: Float64Array, uniform: () => number): Float64Array {
  const start = share.map((value) => value + 0.5 * uniform())
  for (let i = 0; i < items; i++) {
    const row = start.subarray(i * labels, (i + 1) * labels)
    const sum = row.reduce((total, value) => total + value, 0)
    row.forEach((value, l) => (row[l] = value / sum))
  }
  return start
}

/** EM from given posteriors T, [items x classes]. */
export function fitFrom(readings: Readings, start: Float64Array): LatentClassFit {
  const { items, labels, observers } = readings
  checkSameLength('start', start, items * labels)
  const fit: LatentClassFit = {
    prevalence: new Float64Array(labels),
    rates: new Float64Array(observers * labels * labels),
    posterior: Float64Array.from(start),
    logLikelihood: -Infinity,
    firstLogLikelihood: NaN,
    iterations: 0,
  }
  for (let moved = Infinity; moved > stillness && fit.iterations < mostIterations; fit.iterations++) {
    reestimate(readings, fit)
    moved = reclassify(readings, fit)
    if (fit.iterations === 0) fit.firstLogLikelihood = fit.logLikelihood
  }
  return fit
}

/** M step (Dawid & Skene 1979, eqs. 2.3 and 2.4): p_j = sum_i T_ij / I; pi_jl(k) = sum_i T_ij n_il(k) / sum_i sum_l T_ij n_il(k). */
function reestimate(
  { items, observers, labels, times, weight }: Readings,
  { prevalence, rates, posterior }: LatentClassFit,
): void {
  prevalence.fill(0)
  rates.fill(0)
  let total = 0
  for (let i = 0; i < items; i++) {
    const share = weight ? weight[i] : 1
    total += share
    for (let j = 0; j < labels; j++) {
      const t = share * posterior[i * labels + j]
      prevalence[j] += t
      for (let k = 0; k < observers; k++) {
        for (let l = 0; l < labels; l++)
          rates[(k * labels + j) * labels + l] += t * times[(i * observers + k) * labels + l]
      }
    }
  }
  for (let j = 0; j < labels; j++) prevalence[j] /= total
  for (let row = 0; row < rates.length; row += labels) {
    let sum = 0
    for (let l = 0; l < labels; l++) sum += rates[row + l]
    if (sum > 0) for (let l = 0; l < labels; l++) rates[row + l] /= sum
  }
}

/**
 * E step (eq. 2.5): T_ij proportional to p_j prod_k prod_l pi_jl(k)^n_il(k), with 0^0 = 1. Sets the log-likelihood and
 * returns the largest change of any T.
 */
function reclassify({ items, observers, labels, times, weight }: Readings, fit: LatentClassFit): number {
  const { prevalence, rates, posterior } = fit
  const density = new Float64Array(labels)
  let moved = 0
  fit.logLikelihood = 0
  for (let i = 0; i < items; i++) {
    for (let j = 0; j < labels; j++) {
      let product = prevalence[j]
      for (let k = 0; k < observers; k++) {
        for (let l = 0; l < labels; l++) {
          const n = times[(i * observers + k) * labels + l]
          if (n > 0) product *= rates[(k * labels + j) * labels + l] ** n
        }
      }
      density[j] = product
    }
    const sum = density.reduce((total, value) => total + value, 0)
    fit.logLikelihood += (weight ? weight[i] : 1) * Math.log(sum)
    for (let j = 0; j < labels; j++) {
      const t = density[j] / sum
      moved = Math.max(moved, Math.abs(t - posterior[i * labels + j]))
      posterior[i * labels + j] = t
    }
  }
  return moved
}

function checkReadings({ items, observers, labels, times, weight }: Readings): void {
  checkInteger('items', items, 1)
  checkInteger('observers', observers, 1)
  checkInteger('labels', labels, 2)
  checkSameLength('times', times, items * observers * labels)
  times.forEach((n, at) => checkAtLeast(`times[${at}]`, n, 0))
  if (!weight) return
  checkSameLength('weight', weight, items)
  weight.forEach((n, i) => checkAtLeast(`weight[${i}]`, n, 0))
  if (!weight.some((n) => n > 0))
    throw new Fault('argument', 'weight', 0, 'weight must be above 0 for some item; it is 0 for all')
}
