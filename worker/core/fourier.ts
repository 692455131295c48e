import ndarray from 'ndarray'
import fft from 'ndarray-fft'
import { Fault } from '../check.ts'

/** Fourier coefficients X_k = sum of x_n e^(-2 pi i k n / N), the usual sign; columns [N], N a power of two. */
export interface Coefficients {
  real: Float64Array
  imaginary: Float64Array
}

/** The smallest power of two that is at least as large. */
export function powerOfTwoFrom(length: number): number {
  let power = 1
  while (power < length) power *= 2
  return power
}

/**
 * Fourier transform of a real column whose length is a power of two; other lengths take many times as long and are refused.
 * The package underneath transforms with e^(+i): for a real column the conjugate of the usual coefficients.
 */
export function transform(column: Float64Array): Coefficients {
  checkLength(column.length)
  const real = column.slice()
  const imaginary = new Float64Array(column.length)
  fft(1, ndarray(real), ndarray(imaginary))
  for (let k = 0; k < imaginary.length; k++) imaginary[k] = -imaginary[k]
  return { real, imaginary }
}

/** The real column that has these coefficients, which are used up. */
export function transformBack({ real, imaginary }: Coefficients): Float64Array {
  checkLength(real.length)
  for (let k = 0; k < imaginary.length; k++) imaginary[k] = -imaginary[k]
  fft(-1, ndarray(real), ndarray(imaginary))
  return real
}

function checkLength(length: number): void {
  if (length < 1 || powerOfTwoFrom(length) !== length) {
    throw new Fault('internal', 'length', length, `a Fourier transform takes a power of two; it is given ${length}`)
  }
}
