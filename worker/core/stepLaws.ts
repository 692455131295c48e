import type { CountChain, GapLaw } from './countChain.ts'

/** Distribution of a whole number of years: probability[k] belongs to first + k. */
export interface WholeYears {
  first: number
  probability: Float64Array
}

/** How many years each step takes, for one value of the bias. */
export interface StepLaws {
  /** Step i takes shift[i] + 0, 1 or 2 years with the three probabilities from tap[3 i] on; [levels] and [3 x levels]. */
  shift: Int32Array
  tap: Float64Array
  gaps: ReadonlyMap<number, WholeYears>
  /** Mean and variance of the years from level 0 to each level, [levels]. */
  mean: Float64Array
  variance: Float64Array
}

/**
 * The steps of a count whose true years are `factor` times the counted ones on average. A factor above 1 means years that
 * the count misses everywhere alike: at each step one more year passes with the probability (factor - 1) times the step's
 * expected years. Below 1, counted years are false: each is real with the probability `factor`. Either way the error grows
 * in proportion to depth with the bias and with the square root of depth by chance. A hiatus is not counted and has no bias.
 */
export function stepLaws(chain: CountChain, factor: number): StepLaws {
  const { levels, ends, missed } = chain
  const shift = new Int32Array(levels)
  const tap = new Float64Array(3 * levels)
  const mean = new Float64Array(levels)
  const variance = new Float64Array(levels)
  const gaps = new Map<number, WholeYears>()
  tap[0] = 1
  for (let i = 1; i < levels; i++) {
    const law = chain.gaps.get(i)
    if (law) {
      const years = gapYears(law, factor)
      const moments = momentsOf(years)
      gaps.set(i, years)
      mean[i] = mean[i - 1] + moments.mean
      variance[i] = variance[i - 1] + moments.variance
      continue
    }
    const real = factor < 1 ? ends[i] * factor : ends[i]
    const rate = factor < 1 ? missed[i] * factor : missed[i] + (factor - 1) * (ends[i] + missed[i])
    const whole = Math.floor(rate)
    const extra = rate - whole
    shift[i] = whole
    tap[3 * i] = (1 - real) * (1 - extra)
    tap[3 * i + 1] = real * (1 - extra) + (1 - real) * extra
    tap[3 * i + 2] = real * extra
    mean[i] = mean[i - 1] + real + rate
    variance[i] = variance[i - 1] + real * (1 - real) + extra * (1 - extra)
  }
  return { shift, tap, gaps, mean, variance }
}

/** Points of the normal quadrature of a span's years, per standard deviation. */
const pointsPerSd = 40
const sdsOut = 8

/**
 * Whole years in a gap. Unreadable spans: log-normal with the two moments of renewal theory, spread over whole years so
 * that the mean is kept exactly (a value between two years is shared between them, which adds about 1/6 to the variance:
 * it is taken off first).
 */
export function gapYears(law: GapLaw, factor: number): WholeYears {
  if (law.kind === 'hiatus') {
    const length = law.to - law.from + 1
    return { first: law.from, probability: new Float64Array(length).fill(1 / length) }
  }
  const mean = law.mean * factor
  if (!(mean > 0)) return { first: 0, probability: Float64Array.of(1) }
  const variance = Math.max(0, law.variance * factor * factor - 1 / 6)
  const sigma = Math.sqrt(Math.log1p(variance / (mean * mean)))
  const centre = Math.log(mean) - (sigma * sigma) / 2
  const most = Math.ceil(Math.exp(centre + sdsOut * sigma)) + 1
  const probability = new Float64Array(most + 1)
  let total = 0
  const points = sigma > 0 ? 2 * sdsOut * pointsPerSd : 0
  for (let k = 0; k <= points; k++) {
    const z = points === 0 ? 0 : -sdsOut + k / pointsPerSd
    const weight = Math.exp(-0.5 * z * z)
    const years = Math.exp(centre + sigma * z)
    const whole = Math.floor(years)
    probability[whole] += weight * (whole + 1 - years)
    probability[whole + 1] += weight * (years - whole)
    total += weight
  }
  for (let k = 0; k < probability.length; k++) probability[k] /= total
  return trimmed(probability)
}

/** Leaves out the ends that hold less than 1e-15. */
function trimmed(probability: Float64Array): WholeYears {
  let first = 0
  let end = probability.length
  while (probability[first] < 1e-15) first++
  while (probability[end - 1] < 1e-15) end--
  return { first, probability: probability.slice(first, end) }
}

export function momentsOf({ first, probability }: WholeYears): { mean: number; variance: number } {
  let mean = 0
  let square = 0
  for (let k = 0; k < probability.length; k++) {
    mean += k * probability[k]
    square += k * k * probability[k]
  }
  return { mean: first + mean, variance: Math.max(0, square - mean * mean) }
}
