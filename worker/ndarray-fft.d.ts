declare module 'ndarray-fft' {
  import type { NdArray } from 'ndarray'

  /** Discrete Fourier transform in place: 1 forward with e^(+i), -1 back, divided by the length. */
  export default function fft(direction: 1 | -1, real: NdArray<Float64Array>, imaginary: NdArray<Float64Array>): void
}
