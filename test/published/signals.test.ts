import { describe, expect, it } from 'vitest'
import { lightnessOf, linearFromCoded, luminanceWeights, tristimulusWeights } from '../../worker/core/colour.ts'
import { transform } from '../../worker/core/fourier.ts'
import { loess } from '../../worker/core/loess.ts'
import { movingMean, movingMedian } from '../../worker/core/movingWindow.ts'
import { findPeaks, parabolaVertex } from '../../worker/core/peaks.ts'
import { savitzkyGolay, savitzkyGolayWeights } from '../../worker/core/smoothing.ts'
import { coherence, gradientsOf, normalAngle } from '../../worker/core/structureTensor.ts'

function expectAll(found: ArrayLike<number>, expected: number[], tolerance: number): void {
  expect(found.length).toBe(expected.length)
  expected.forEach((value, i) =>
    expect(Math.abs(found[i] - value), `value ${i}: ${found[i]}, expected ${value}`).toBeLessThanOrEqual(tolerance),
  )
}

const ten = Float64Array.from([3, 5, 4, 8, 12, 9, 7, 10, 11, 6])

describe('smoothing', () => {
  it('has the weights of Savitzky & Golay 1964, tables I and following (exact fractions)', () => {
    const tables: [number, number, number[], number][] = [
      [5, 2, [-3, 12, 17, 12, -3], 35],
      [7, 2, [-2, 3, 6, 7, 6, 3, -2], 21],
      [9, 2, [-21, 14, 39, 54, 59, 54, 39, 14, -21], 231],
      [11, 3, [-36, 9, 44, 69, 84, 89, 84, 69, 44, 9, -36], 429],
      [7, 4, [5, -30, 75, 131, 75, -30, 5], 231],
      [11, 4, [18, -45, -10, 60, 120, 143, 120, 60, -10, -45, 18], 429],
    ]
    for (const [length, degree, weights, sum] of tables) {
      expectAll(
        savitzkyGolayWeights(length, degree),
        weights.map((weight) => weight / sum),
        1e-14,
      )
    }
    expectAll(savitzkyGolayWeights(5, 2, 0, 1), [-0.2, -0.1, 0, 0.1, 0.2], 1e-15)
    expectAll(
      savitzkyGolayWeights(5, 2, 0, 2),
      [2, -1, -2, -1, 2].map((weight) => weight / 7),
      1e-15,
    )
  })

  it('of ten values over 5, quadratic, ends from the polynomial of the end windows (scipy, mode interp; 1e-6)', () => {
    expectAll(
      savitzkyGolay(ten, 5, 2),
      [3.485714, 3.657143, 5.114286, 8.171429, 10.714286, 9.342857, 7.942857, 9.742857, 8.971429, 7.057143],
      5.1e-7,
    )
  })

  it('by moving mean and median of the same values (worked by hand)', () => {
    expectAll(movingMean(ten, 1).slice(1, 9), [4, 17 / 3, 8, 29 / 3, 28 / 3, 26 / 3, 28 / 3, 9], 1e-12)
    expectAll(movingMedian(ten, 1).slice(1, 9), [4, 5, 8, 9, 9, 9, 10, 10], 0)
    expectAll(movingMean(ten, 2).slice(2, 8), [6.4, 7.6, 8, 9.2, 9.8, 8.6], 1e-12)
  })
})

/** Speed and stopping distance of cars (Ezekiel 1930, as R's `cars`), 50 pairs. */
const cars =
  '4:2 4:10 7:4 7:22 8:16 9:10 10:18 10:26 10:34 11:17 11:28 12:14 12:20 12:24 12:28 13:26 13:34 13:34 13:46 14:26 14:36 ' +
  '14:60 14:80 15:20 15:26 15:54 16:32 16:40 17:32 17:40 17:50 18:42 18:56 18:76 18:84 19:36 19:46 19:68 20:32 20:48 20:52 ' +
  '20:56 20:64 22:66 23:54 24:70 24:92 24:93 24:120 25:85'
const pairs = cars.split(' ').map((pair) => pair.split(':').map(Number))
const speed = Float64Array.from(pairs, ([x]) => x)
const distance = Float64Array.from(pairs, ([, y]) => y)

/** Expected fits as "x:fit" for every x named. */
function expectFits(fit: Float64Array, expected: string): void {
  for (const [x, value] of expected.split(' ').map((pair) => pair.split(':').map(Number))) {
    for (const [i, at] of speed.entries()) {
      if (at === x) expect(Math.abs(fit[i] - value), `at ${x}: ${fit[i]}, R ${value}`).toBeLessThan(1e-5)
    }
  }
}

describe('locally weighted regression on R’s cars (computed in R 4; 1e-5, the digits R was printed with)', () => {
  const share = (f: number) => Math.floor(f * speed.length + 1e-7)

  it('is LOWESS of Cleveland 1979 with f = 2/3 and three robust rounds', () => {
    const fit = loess(speed, distance, { neighbours: share(2 / 3), degree: 1, robustRounds: 3, delta: 0 })
    expectFits(
      fit,
      '4:4.965459 7:13.124495 8:15.858633 9:18.579691 10:21.280313 11:24.129277 12:27.119549 13:30.027276 ' +
        '14:32.962506 15:36.757728 16:40.435075 17:43.463492 18:46.885479 19:50.793152 20:56.491224 22:67.585824 ' +
        '23:73.079695 24:78.643164 25:84.328698',
    )
  })

  it('without robust rounds, and over a fifth of the points', () => {
    expectFits(
      loess(speed, distance, { neighbours: share(2 / 3), degree: 1, robustRounds: 0, delta: 0 }),
      '4:3.443864 7:12.784337 8:15.952393 10:22.187105 15:41.103033 20:59.411096 25:89.127515',
    )
    const narrow = loess(speed, distance, { neighbours: share(0.2), degree: 1, robustRounds: 3, delta: 0 })
    expectAll(
      [1, 5, 10, 25, 40, 50].map((row) => narrow[row - 1]),
      [6.030408, 15.383796, 23.306483, 37.937118, 51.001919, 92.725141],
      1e-5,
    )
  })

  it('is LOESS with local parabolas over three quarters, and local lines over half the points, direct surface', () => {
    expectFits(
      loess(speed, distance, { neighbours: share(0.75), degree: 2, robustRounds: 0, delta: 0 }),
      '4:5.887057 5:7.741006 10:21.865315 15:41.205226 20:56.445263 25:95.300523',
    )
    expectFits(
      loess(speed, distance, { neighbours: share(0.5), degree: 1, robustRounds: 0, delta: 0 }),
      '4:5.312696 10:21.389603 15:40.810606 20:56.558904 25:90.728311',
    )
  })
})

describe('peaks', () => {
  it('have the prominence of their definition: height over the higher of the two lowest points before a higher sample', () => {
    const alternating = findPeaks(Float64Array.from([0, 1, 0, 3, 1, 2, 0, 5, 2, 4, 0]))
    expect([...alternating.index]).toEqual([1, 3, 5, 7, 9])
    expect([...alternating.prominence]).toEqual([1, 3, 1, 5, 2])
    const shoulders = findPeaks(Float64Array.from([1, 3, 2, 2.5, 0, 4, 3.5, 4.2, 1, 2, 1.5]))
    expectAll(shoulders.prominence, [2, 0.5, 0.5, 3.2, 0.5], 1e-12)
  })

  it('have their summit at the vertex of the parabola through three samples (derived)', () => {
    expect(parabolaVertex(2, 5, 4)).toEqual({ offset: 0.25, height: 5.125 })
    const parabola = (t: number) => -2 * (t - 0.3) ** 2 + 7
    const vertex = parabolaVertex(parabola(-1), parabola(0), parabola(1))
    expect(vertex.offset).toBeCloseTo(0.3, 14)
    expect(vertex.height).toBeCloseTo(7, 14)
  })
})

describe('colour', () => {
  const weigh = (weights: readonly number[], values: number[]) =>
    weights.reduce((sum, weight, i) => sum + weight * values[i], 0)

  it('has the luminance of ITU-R BT.709 and the transfer curve of IEC 61966-2-1 (derived; 1e-8)', () => {
    expect(weigh(luminanceWeights, [200, 100, 50])).toBeCloseTo(117.65, 10)
    expect(linearFromCoded(128 / 255)).toBeCloseTo(0.2158605, 8)
    expect(linearFromCoded(10 / 255)).toBeCloseTo(0.00303527, 8)
    expect(linearFromCoded(11 / 255)).toBeCloseTo(0.00334654, 8)
  })

  it('has the lightness L* of sRGB colours under D65 (published for red; the others computed with the same matrix; 5e-4)', () => {
    const expected: [number[], number][] = [
      [[255, 0, 0], 53.2408],
      [[0, 255, 0], 87.7347],
      [[0, 0, 255], 32.297],
      [[255, 255, 0], 97.1393],
      [[0, 255, 255], 91.1132],
      [[255, 0, 255], 60.3242],
      [[128, 128, 128], 53.585],
      [[119, 119, 119], 50.0344],
      [[10, 10, 10], 2.7417],
      [[139, 115, 85], 49.9863],
      [[64, 48, 32], 21.2388],
    ]
    for (const [colour, lightness] of expected) {
      const linear = colour.map((code) => linearFromCoded(code / 255))
      expect(Math.abs(lightnessOf(weigh(tristimulusWeights, linear)) - lightness), String(colour)).toBeLessThan(5e-4)
    }
    // A published conversion with the same white: Y 0.40 has L* 69.4695.
    expect(lightnessOf(0.4)).toBeCloseTo(69.4695, 4)
  })
})

describe('the structure tensor of sin(2 pi (x sin 7° + y cos 7°) / 8) on 64 x 64 pixels', () => {
  const seven = (7 * Math.PI) / 180
  const wave = (x: number, y: number) => (2 * Math.PI * (x * Math.sin(seven) + y * Math.cos(seven))) / 8
  const sums = (gradients: (x: number, y: number) => [number, number], from: number, to: number) => {
    const tensor = { xx: 0, xy: 0, yy: 0 }
    for (let y = from; y < to; y++) {
      for (let x = from; x < to; x++) {
        const [gx, gy] = gradients(x, y)
        tensor.xx += gx * gx
        tensor.xy += gx * gy
        tensor.yy += gy * gy
      }
    }
    return tensor
  }
  const tiltOf = (tensor: { xx: number; xy: number; yy: number }) => 90 - (normalAngle(tensor) * 180) / Math.PI

  it('has a tilt of 7 degrees and coherence 1 by analytic gradients (1e-6)', () => {
    const tensor = sums(
      (x, y) => [Math.sin(seven) * Math.cos(wave(x, y)), Math.cos(seven) * Math.cos(wave(x, y))],
      0,
      64,
    )
    expect(tiltOf(tensor)).toBeCloseTo(7, 6)
    expect(coherence(tensor)).toBeCloseTo(1, 6)
  })

  it('is read 0.742 degrees too steep by differences between neighbours: why they are not used (derived; 1e-6)', () => {
    const value = (x: number, y: number) => Math.sin(wave(x, y))
    const central = (x: number, y: number): [number, number] => [
      (value(x + 1, y) - value(x - 1, y)) / 2,
      (value(x, y + 1) - value(x, y - 1)) / 2,
    ]
    expect(tiltOf(sums(central, 0, 64))).toBeCloseTo(7.742148, 6)
  })

  it('is read within 0.1 degrees by Gaussian derivatives of 1.5 pixels', () => {
    const raster = Float32Array.from({ length: 64 * 64 }, (_, i) => Math.sin(wave(i % 64, Math.floor(i / 64))))
    const { across, along } = gradientsOf(raster, 64, 64, 1.5, 1.5)
    const tensor = sums((x, y) => [across[y * 64 + x], along[y * 64 + x]], 5, 59)
    expect(Math.abs(tiltOf(tensor) - 7)).toBeLessThan(0.1)
    expect(coherence(tensor)).toBeGreaterThan(0.999)
  })
})

describe('the Fourier transform', () => {
  it('has the usual sign: a column and itself rolled by 3 correlate best at 3, with the sum of squares, 42 (computed with numpy)', () => {
    const column = Float64Array.from([1, 3, 2, 5, 4, 8, 6, 7], (value) => value - 4.5)
    const rolled = column.map((_, i) => column[(i - 3 + 8) % 8])
    const a = transform(column)
    const b = transform(rolled)
    // Correlation theorem: conj(A) B has the correlation at lag k as its k-th coefficient; summed out directly here.
    const correlation = Array.from({ length: 8 }, (_, lag) => {
      let sum = 0
      for (let k = 0; k < 8; k++) {
        const real = a.real[k] * b.real[k] + a.imaginary[k] * b.imaginary[k]
        const imaginary = a.real[k] * b.imaginary[k] - a.imaginary[k] * b.real[k]
        const angle = (2 * Math.PI * k * lag) / 8
        sum += (real * Math.cos(angle) - imaginary * Math.sin(angle)) / 8
      }
      return sum
    })
    expect(correlation.indexOf(Math.max(...correlation))).toBe(3)
    expect(correlation[3]).toBeCloseTo(42, 10)
  })
})
