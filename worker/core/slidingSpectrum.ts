import { checkInteger, checkWithin } from '../check.ts'
import type { Work } from '../work.ts'
import { powerOfTwoFrom, transform } from './fourier.ts'

export interface SpectrumRules {
  /** Length of the window that slides along the signal, rows. */
  window: number
  /** Rows from one window to the next. */
  step: number
  /** Shortest and longest period shown, rows. */
  shortest: number
  longest: number
  periodsPerOctave: number
}

/** How strongly each period is present around each position; for the eye, and no part of the count. */
export interface SlidingSpectrum {
  /** Middles of the windows, path pixels: [positions]. */
  position: Float64Array
  /** Path pixels, a constant ratio apart: [periods]. */
  period: Float64Array
  /** Power spectral density times frequency, so that equal areas over the logarithm of the period are equal variances;
   * [positions x periods], row-major, NaN where more than half of a window is unreadable. */
  power: Float32Array
}

/** Windows are padded with zeros to this many times their length: periods between the coefficients are drawn smoothly. */
const padding = 4

/**
 * Periodogram in a sliding window with a Hann taper w_k = 0.5 (1 - cos(2 pi k / M)), k + 0.5 for symmetry, of the signal less
 * its mean in the window; P(f) = 2 |X(f)|^2 / sum of w^2, whose integral over f from 0 to 1/2 is the variance under the taper.
 */
export function* slidingSpectrum(signal: Float64Array, rules: SpectrumRules): Work<SlidingSpectrum> {
  const { window } = rules
  checkInteger('window', window, 8, 1 << 22)
  checkInteger('step', rules.step, 1)
  checkWithin('shortest period', rules.shortest, 2, window)
  checkWithin('longest period', rules.longest, rules.shortest, window)
  checkInteger('periods per octave', rules.periodsPerOctave, 1, 100)
  const positions = Math.max(0, Math.floor((signal.length - window) / rules.step) + 1)
  const periods = Math.floor(rules.periodsPerOctave * Math.log2(rules.longest / rules.shortest)) + 1
  const period = Float64Array.from({ length: periods }, (_, k) => rules.shortest * 2 ** (k / rules.periodsPerOctave))
  const position = Float64Array.from({ length: positions }, (_, k) => k * rules.step + window / 2)
  const power = new Float32Array(positions * periods).fill(NaN)
  const taper = Float64Array.from(
    { length: window },
    (_, k) => 0.5 * (1 - Math.cos((2 * Math.PI * (k + 0.5)) / window)),
  )
  const padded = new Float64Array(powerOfTwoFrom(padding * window))
  for (let at = 0; at < positions; at++) {
    yield { stage: 'spectrum', done: at, total: positions }
    const energy = fillWindow(padded, signal.subarray(at * rules.step, at * rules.step + window), taper)
    if (!(energy > 0)) continue
    const { real, imaginary } = transform(padded)
    for (let k = 0; k < periods; k++) {
      const place = padded.length / period[k]
      const before = Math.min(padded.length / 2 - 1, Math.floor(place))
      const share = place - before
      const square = (i: number) => real[i] * real[i] + imaginary[i] * imaginary[i]
      const density = (2 * ((1 - share) * square(before) + share * square(before + 1))) / energy
      power[at * periods + k] = density / period[k]
    }
  }
  return { position, period, power }
}

/** Puts a window, tapered, less its mean and 0 in gaps, at the head of `padded`; returns the sum of the squared taper, 0 where too little is readable. */
function fillWindow(padded: Float64Array, rows: Float64Array, taper: Float64Array): number {
  let sum = 0
  let weight = 0
  let energy = 0
  let readable = 0
  for (let k = 0; k < rows.length; k++) {
    if (!Number.isFinite(rows[k])) continue
    sum += taper[k] * rows[k]
    weight += taper[k]
    energy += taper[k] * taper[k]
    readable++
  }
  if (2 * readable < rows.length) return 0
  padded.fill(0)
  for (let k = 0; k < rows.length; k++) if (Number.isFinite(rows[k])) padded[k] = taper[k] * (rows[k] - sum / weight)
  return energy
}
