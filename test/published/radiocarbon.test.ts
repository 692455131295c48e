import { describe, expect, it } from 'vitest'
import { combineDates } from '../../worker/core/combineDates.ts'
import { chiSquareBeyond, chiSquareCritical } from '../../worker/core/chiSquare.ts'
import { ageErrorOfF14c, ageOfF14c, f14cErrorOfAge, f14cOfAge } from '../../worker/core/curve.ts'
import { densityOf, normalDensity, studentModel } from '../../worker/core/errorModel.ts'

const near = (value: number, expected: number, tolerance: number) =>
  expect(Math.abs(value - expected), `${value} against ${expected}`).toBeLessThanOrEqual(tolerance)

describe('F14C and conventional age, mean-life 8033 a (Stuiver & Polach 1977, from memory; formula as laboratories print it)', () => {
  it.each([
    [0, 1],
    [100, 0.987629],
    [1000, 0.88295],
    [5000, 0.536637],
    [5568, 0.500003],
    [8033, 0.367879],
    [10000, 0.28798],
    [50000, 0.001981],
  ])('%d 14C a is F14C %d (1e-6: as many digits as given)', (age, f14c) => near(f14cOfAge(age), f14c, 1e-6))

  it.each([
    [0.99, 80.7],
    [0.95, 412.0],
    [0.9, 846.4],
    [0.8, 1792.5],
    [0.7, 2865.2],
    [0.5, 5568.1],
    [0.25, 11136.1],
    [0.1, 18496.7],
    [0.01, 36993.3],
  ])('F14C %d is %d 14C a (0.1 a)', (f14c, age) => near(ageOfF14c(f14c), age, 0.05))

  it('errors to first order: F14C .850 +- .003 is 1305.515 +- 28.352 a; 4500 +- 30 a is .571101 +- .002133', () => {
    near(ageOfF14c(0.85), 1305.515, 5e-4)
    near(ageErrorOfF14c(0.85, 0.003), 28.352, 5e-4)
    near(f14cOfAge(4500), 0.571101, 1e-6)
    near(f14cErrorOfAge(4500, 30), 0.002133, 1e-6)
  })

  it('an old F14C of .020 +- .001 has bounds 391 a younger and 412 a older', () => {
    near(ageOfF14c(0.02), 31425, 1)
    near(ageOfF14c(0.021), 31033, 1)
    near(ageOfF14c(0.019), 31837, 1)
  })
})

describe('the Student-t error model (Christen & Perez 2009, Radiocarbon 51, 1047, from memory; values recomputed with scipy, 1e-8)', () => {
  const density = densityOf(studentModel)
  it.each([
    [0, 0.3314563, 0.83084],
    [1, 0.21947874, 0.90705],
    [2, 0.08018754, 1.4852],
    [3, 0.02369573, 5.34669],
    [5, 0.0023251, 1563.9],
  ])('at %d sigma the density is %d, %d times the normal', (d, value, ratio) => {
    near(density(d, 1), value, 1e-8)
    near(density(d, 1) / normalDensity(d, 1), ratio, ratio * 1e-4)
  })

  it('the case a = 3 equals the general formula, and scales with sigma', () => {
    const general = densityOf({ kind: 'student-t', a: 3 + 1e-12, b: 4 })
    for (const d of [0, 10, 100]) near(density(d, 30), general(d, 30), 1e-12)
  })

  it('integrates to 1 with the variance 2 sigma^2 (derived: b / (a - 1))', () => {
    let sum = 0
    let square = 0
    for (let x = -4000; x <= 4000; x += 0.05) {
      sum += 0.05 * density(x, 1)
      square += 0.05 * x * x * density(x, 1)
    }
    near(sum, 1, 1e-6)
    near(square, 2, 1e-6)
  })
})

describe('pooling dates (Ward & Wilson 1978)', () => {
  it('three laboratories on one textile (Damon et al. 1989; recomputed with numpy): 689.119 +- 16.038, T 6.3518, p .0418', () => {
    const { value, sigma, t, degrees, probability } = combineDates([646, 750, 676], [31, 30, 24])
    near(value, 689.119, 5e-4)
    near(sigma, 16.038, 5e-4)
    near(t, 6.3518, 5e-5)
    expect(degrees).toBe(2)
    near(probability, 0.0418, 5e-5)
  })

  it('chi-square at the .95 level: 7.814728 for 3 and 9.487729 for 4 degrees of freedom (scipy, 1e-6)', () => {
    near(chiSquareCritical(0.05, 3), 7.814728, 1e-6)
    near(chiSquareCritical(0.05, 4), 9.487729, 1e-6)
    near(chiSquareBeyond(7.814728, 3), 0.05, 1e-7)
  })
})
