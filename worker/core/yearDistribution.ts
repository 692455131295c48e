import { bedTail, tailLength } from './layerPairs.ts'
import type { YearLaw } from './layerPairs.ts'
import type { Messages, Stretch } from './semiMarkov.ts'
import { survivalAt } from './thicknessLaw.ts'

/** Probability of each number of years: probability[k] belongs to `first + k` years. */
export interface YearDistribution {
  first: number
  probability: Float64Array
}

/** Joint probability below which a pair of neighbours is not followed; 20,000 years lose less than 1e-10 by it. */
const leastPair = 1e-16
/** Beyond so many of its lengths the exponential tail is below 1e-16. */
const furthest = 40

/** A count distribution under construction: values[k] belongs to first + k. */
interface Band {
  first: number
  values: Float64Array
}

const nothing: Band = { first: 0, values: new Float64Array(0) }
const zeroYears: Band = { first: 0, values: Float64Array.of(1) }

/**
 * The exact distribution of the number of boundaries among the sites [from, to) of a stretch, given everything seen in the
 * whole stretch. Sites depend on each other through the thickness law, so the sum is no Poisson-binomial: the recursion
 * carries, for every site, the distribution of the count up to it given that it is a boundary,
 *   C_j = first_j e_0 + sum_i p(i | j) C_i, shifted by one,   p(i | j) = down_i g(i, j) w_j / down_j,
 * and adds up C_j over the last boundary of the range. Bands follow the mass.
 */
export function yearDistribution(
  stretch: Stretch,
  law: YearLaw,
  messages: Messages,
  from: number,
  to: number,
): YearDistribution {
  const { u, weight, forced } = stretch
  const { value, scale } = messages.down
  const { offset, weight: pair } = messages.pairs
  const bands: Band[] = new Array<Band>(to - from).fill(nothing)
  const tail = new Tail(law)
  const result = new Mixture()
  const parts = new Mixture()
  const lastForced = forced.subarray(0, to).lastIndexOf(1)
  let entered = from
  let lastShares = 0
  for (let j = from; j < to; j++) {
    tail.moveTo(u[j])
    for (; entered < j && u[j] - u[entered] > law.thickness.longest; entered++) {
      tail.add(bands[entered - from], Math.log(value[entered]) + scale[entered], u[entered])
      bands[entered - from] = nothing
    }
    const posterior = messages.probability[j]
    if (!(posterior > leastPair)) continue
    const least = leastPair / posterior
    let inside = 0
    for (let i = entered; i < j; i++) {
      if (bands[i - from] === nothing) continue
      const share = ((value[i] * pair[offset[i] + j - i - 1] * weight[j]) / value[j]) * Math.exp(scale[i] - scale[j])
      if (!(share > least)) continue
      parts.add(bands[i - from], share)
      inside += share
    }
    const far = tail.share(Math.log(weight[j] / value[j]) - scale[j])
    if (far > least) {
      parts.add(tail.band, far / tail.sum)
      inside += far
    }
    if (inside < 1) parts.add(zeroYears, 1 - inside)
    const band = parts.take()
    band.first++
    bands[j - from] = band
    // No ladder ends its part of the range before the range's last forced site.
    const last = j < lastForced ? 0 : posterior * lastShare(stretch, law, messages, j, to)
    if (last > leastPair) {
      result.add(band, last)
      lastShares += last
    }
    if (forced[j] === 1) {
      tail.clear()
      entered = j
    }
  }
  if (lastShares < 1) result.add(zeroYears, 1 - lastShares)
  return normalised(result.take())
}

/** Probability that a boundary at site j is followed by none before site `to`. */
function lastShare(stretch: Stretch, law: YearLaw, { up, pairs }: Messages, j: number, to: number): number {
  const { u, weight, forced, end } = stretch
  const own = Math.log(up.value[j] / weight[j]) + up.scale[j]
  let share = 0
  for (let k = to; k < u.length && u[k] - u[j] < furthest * tailLength(law); k++) {
    const at = pairs.offset[j] + k - j - 1
    const g = at < pairs.offset[j + 1] ? pairs.weight[at] : bedTail(law, u[k] - u[j])
    share += g * up.value[k] * Math.exp(up.scale[k] - own)
    if (forced[k] === 1) return share
  }
  return share + survivalAt(law.thickness, end - u[j]) * Math.exp(-own)
}

/** The distributions of all sites further back than the law's table, in one decaying sum. */
class Tail {
  band: Band = nothing
  /** Sum of the band's values. */
  sum = 0
  private logFactor = 0
  private at = -Infinity
  constructor(private readonly law: YearLaw) {}

  moveTo(u: number): void {
    if (this.band !== nothing) this.logFactor -= (u - this.at) / tailLength(this.law)
    this.at = u
  }

  add(band: Band, logValue: number, u: number): void {
    const gap = bedTail(this.law, this.at - u)
    if (band === nothing || !(gap > 0)) return
    let log = logValue + Math.log(gap) - this.logFactor
    if (log > 100 || this.band === nothing) {
      const factor = Math.exp(-log)
      this.band = { first: this.band.first, values: this.band.values.map((one) => one * factor) }
      this.sum *= factor
      this.logFactor += log
      log = 0
    }
    const both = new Mixture()
    both.add(this.band, 1)
    both.add(band, Math.exp(log))
    this.band = both.take()
    this.sum += Math.exp(log)
  }

  share(logRatio: number): number {
    return this.sum > 0 ? this.sum * Math.exp(this.logFactor + logRatio) : 0
  }

  clear(): void {
    this.band = nothing
    this.sum = 0
    this.logFactor = 0
  }
}

/** A weighted sum of bands, laid out once all of them are known; empty again after `take`. */
class Mixture {
  private readonly bands: Band[] = []
  private readonly factors: number[] = []

  add(band: Band, factor: number): void {
    if (band.values.length === 0) return
    this.bands.push(band)
    this.factors.push(factor)
  }

  take(): Band {
    let low = Infinity
    let high = -Infinity
    for (const { first, values } of this.bands) {
      low = Math.min(low, first)
      high = Math.max(high, first + values.length)
    }
    const sum = new Float64Array(Math.max(0, high - low))
    for (let b = 0; b < this.bands.length; b++) {
      const { first, values } = this.bands[b]
      const factor = this.factors[b]
      const offset = first - low
      for (let k = 0; k < values.length; k++) sum[offset + k] += factor * values[k]
    }
    this.bands.length = 0
    this.factors.length = 0
    return trimmed({ first: Number.isFinite(low) ? low : 0, values: sum })
  }
}

/** Cuts ends that hold nothing of weight. */
function trimmed({ first, values }: Band): Band {
  let most = 0
  for (const one of values) if (one > most) most = one
  const least = most * leastPair
  let low = 0
  let high = values.length
  while (low < high && !(values[low] > least)) low++
  while (high > low && !(values[high - 1] > least)) high--
  return { first: first + low, values: low === 0 && high === values.length ? values : values.slice(low, high) }
}

function normalised({ first, values }: Band): YearDistribution {
  let sum = 0
  for (const one of values) sum += one
  return { first, probability: values.map((one) => one / sum) }
}

/** Distribution of the sum of two independent counts. */
export function sumOfYears(a: YearDistribution, b: YearDistribution): YearDistribution {
  const values = new Float64Array(a.probability.length + b.probability.length - 1)
  for (let i = 0; i < a.probability.length; i++) {
    for (let j = 0; j < b.probability.length; j++) values[i + j] += a.probability[i] * b.probability[j]
  }
  return normalised(trimmed({ first: a.first + b.first, values }))
}

export interface YearSummary {
  mean: number
  sd: number
  /** Smallest whole numbers that leave at most 2.5 % below and above. */
  range95: [number, number]
}

export function summaryOfYears({ first, probability }: YearDistribution): YearSummary {
  let mean = 0
  let square = 0
  let low = NaN
  let high = NaN
  let below = 0
  for (let k = 0; k < probability.length; k++) {
    mean += k * probability[k]
    square += k * k * probability[k]
    below += probability[k]
    if (Number.isNaN(low) && below > 0.025) low = first + k
    if (Number.isNaN(high) && below >= 0.975) high = first + k
  }
  if (Number.isNaN(high)) high = first + probability.length - 1
  return { mean: first + mean, sd: Math.sqrt(Math.max(0, square - mean * mean)), range95: [low, high] }
}
