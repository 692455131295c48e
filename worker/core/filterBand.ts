import { densityAt } from './dates.ts'
import type { DateLikelihood } from './dates.ts'
import type { StepLaws } from './stepLaws.ts'

/** Empty cells kept on either side of the band, so that a step reads past its ends without asking. */
const pad = 2

/**
 * Two distributions over the same band of whole x = low ... low + width - 1, in one buffer each, changed in place:
 * `a` and `s` of the way down (see forwardPass). True values are the stored ones times exp(logScale).
 */
export class FilterBand {
  low: number
  width: number
  logScale = 0
  private a: Float64Array
  private s: Float64Array
  /** Index of x = low in the buffers. Cells outside the band are 0. */
  private begin = pad
  private anyS = false

  /** Starts with a = 1 everywhere on the window: no year is preferred to another. */
  constructor({ low, width }: { low: number; width: number }) {
    this.low = low
    this.width = width
    this.a = new Float64Array(width + 2 * pad)
    this.s = new Float64Array(width + 2 * pad)
    this.a.fill(1, pad, pad + width)
  }

  /** Takes step i of the chain. */
  step(laws: StepLaws, i: number): void {
    const gap = laws.gaps.get(i)
    if (gap) {
      this.convolve(gap.first, gap.probability)
      return
    }
    this.low += laws.shift[i]
    const q0 = laws.tap[3 * i]
    const q1 = laws.tap[3 * i + 1]
    const q2 = laws.tap[3 * i + 2]
    if (q0 === 0 && q2 === 0) {
      this.low++
      return
    }
    if (q1 === 0 && q2 === 0) return
    this.makeRoom(q2 > 0 ? 2 : 1)
    this.width += q2 > 0 ? 2 : 1
    blend(this.a, this.begin, this.begin + this.width - 1, q0, q1, q2)
    if (this.anyS) blend(this.s, this.begin, this.begin + this.width - 1, q0, q1, q2)
  }

  /** Multiplies by a date's likelihood; `share` of its maximum lets the paths that miss it live on in `s`. */
  meet(date: DateLikelihood, share: number): void {
    const floor = date.fixed ? 0 : share * date.most
    let sum = 0
    for (let k = 0; k < this.width; k++) {
      const at = this.begin + k
      const density = densityAt(date, this.low + k)
      this.s[at] = this.s[at] * density + floor * this.a[at]
      this.a[at] *= density
      sum += this.a[at] + this.s[at]
    }
    this.anyS ||= floor > 0
    if (!(sum > 0)) return
    for (let k = this.begin; k < this.begin + this.width; k++) {
      this.a[k] /= sum
      this.s[k] /= sum
    }
    this.logScale += Math.log(sum)
  }

  /** Cuts either end as long as what is cut there sums to no more than the limit; false when nothing is left. */
  trim(limit: number): boolean {
    let first = this.begin
    let end = this.begin + this.width
    let cut = 0
    while (first < end && (cut += this.a[first] + this.s[first]) <= limit) {
      this.a[first] = 0
      this.s[first] = 0
      first++
    }
    cut = 0
    while (end > first && (cut += this.a[end - 1] + this.s[end - 1]) <= limit) {
      end--
      this.a[end] = 0
      this.s[end] = 0
    }
    this.low += first - this.begin
    this.width = end - first
    this.begin = first
    return this.width > 0
  }

  sums(): { a: number; s: number } {
    let a = 0
    let s = 0
    for (let k = this.begin; k < this.begin + this.width; k++) {
      a += this.a[k]
      s += this.s[k]
    }
    return { a, s }
  }

  /** Mean and SD of x under a. */
  figures(): { mean: number; sd: number } {
    let sum = 0
    let mean = 0
    for (let k = 0; k < this.width; k++) {
      sum += this.a[this.begin + k]
      mean += k * this.a[this.begin + k]
    }
    mean /= sum
    let square = 0
    for (let k = 0; k < this.width; k++) square += (k - mean) ** 2 * this.a[this.begin + k]
    return { mean: this.low + mean, sd: Math.sqrt(square / sum) }
  }

  copy(): { low: number; logScale: number; a: Float64Array } {
    return { low: this.low, logScale: this.logScale, a: this.a.slice(this.begin, this.begin + this.width) }
  }

  private convolve(first: number, probability: Float64Array): void {
    const width = this.width + probability.length - 1
    const spread = (from: Float64Array) => {
      const to = new Float64Array(width + 2 * pad)
      for (let k = 0; k < this.width; k++) {
        const value = from[this.begin + k]
        if (value === 0) continue
        for (let j = 0; j < probability.length; j++) to[pad + k + j] += value * probability[j]
      }
      return to
    }
    this.a = spread(this.a)
    this.s = spread(this.s)
    this.begin = pad
    this.low += first
    this.width = width
  }

  /** Makes sure that the band can grow to the right: moves it to the front of the buffer, or into a larger one. */
  private makeRoom(more: number): void {
    const end = this.begin + this.width
    if (end + more + pad <= this.a.length) return
    const needed = this.width + more + 2 * pad
    const length = needed * 2 > this.a.length ? needed * 4 : this.a.length
    this.a = moved(this.a, this.begin, this.width, length)
    this.s = moved(this.s, this.begin, this.width, length)
    this.begin = pad
  }
}

function moved(from: Float64Array, begin: number, width: number, length: number): Float64Array {
  const to = new Float64Array(length)
  to.set(from.subarray(begin, begin + width), pad)
  return to
}

/** values[k] <- q0 values[k] + q1 values[k - 1] + q2 values[k - 2] for k from `last` down to `first`, in place. */
function blend(values: Float64Array, first: number, last: number, q0: number, q1: number, q2: number): void {
  let here = values[last]
  let before = values[last - 1]
  for (let k = last; k >= first; k--) {
    const beforeThat = values[k - 2]
    values[k] = q0 * here + q1 * before + q2 * beforeThat
    here = before
    before = beforeThat
  }
}
