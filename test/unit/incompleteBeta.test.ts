import { describe, expect, it } from 'vitest'
import { incompleteBeta, inverseIncompleteBeta, logGamma, studentQuantile } from '../../worker/core/incompleteBeta.ts'

/** x, a, b, I_x(a, b): by mpmath at 30 to 40 digits, betainc or, for the two large ones, quadrature of the density (scipy 1.10 is off by 2e-10 there). */
const table: [number, number, number, number][] = [
  [0.3, 0.5, 0.5, 0.3690101195655454],
  [0.01, 1, 30, 0.2602996266117196],
  [0.04, 3, 98, 0.767857376322496],
  [0.5, 20, 20, 0.5],
  [0.4, 40 / 0.36, 60 / 0.36, 0.5032591114486866],
  [0.031, 600, 19000, 0.6280939090405996],
  [0.97, 0.5, 2.2, 0.9998378418271403],
  [1e-6, 0.5, 3, 0.001874998750000375],
  [0.999, 40, 1.5, 0.9940659901753421],
  [0.5003, 1e6, 1e6, 0.801928037157911],
  [0.02, 20000, 999000, 0.9965267119846484],
]

describe('incompleteBeta', () => {
  it.each(table)('I_%d(%d, %d) is %d', (x, a, b, value) => {
    expect(Math.abs(incompleteBeta(x, a, b) - value)).toBeLessThan(2e-11)
    expect(Math.abs(1 - incompleteBeta(1 - x, b, a) - value)).toBeLessThan(2e-11)
  })

  it('is inverted to the last digits', () => {
    for (const p of [1e-6, 0.025, 0.5, 0.84, 0.975]) {
      for (const [a, b] of [
        [0.5, 0.5],
        [3, 98],
        [40, 60],
        [1200, 40000],
      ] as const) {
        expect(Math.abs(incompleteBeta(inverseIncompleteBeta(p, a, b), a, b) - p)).toBeLessThan(1e-12)
      }
    }
    // scipy.stats.beta.ppf
    expect(inverseIncompleteBeta(0.025, 3, 98)).toBeCloseTo(0.006229971538306395, 12)
    expect(inverseIncompleteBeta(0.975, 3, 98)).toBeCloseTo(0.07038393247107011, 12)
  })

  it('gives the quantiles of Student t that mpmath finds as roots', () => {
    for (const [p, degrees, t] of [
      [0.975, 4, 2.776445105197799],
      [0.975, 1, 12.706204736432095],
      [0.995, 10, 3.169272672616951],
      [0.95, 1e4, 1.645006018069243],
      [0.025, 2.5, -3.574654842003683],
    ] as const) {
      expect(Math.abs(studentQuantile(p, degrees) / t - 1)).toBeLessThan(1e-10)
    }
    expect(studentQuantile(0.5, 7)).toBe(0)
  })

  it('has log Gamma as mpmath has it', () => {
    for (const [x, value] of [
      [0.1, 2.252712651734206],
      [0.5, 0.5723649429247],
      [1, 0],
      [2.5, 0.2846828704729192],
      [11.9, 17.25847745059552],
      [12, 17.50230784587389],
      [100.25, 360.2845596377642],
      [1e5, 1051287.708973657],
    ] as const) {
      expect(Math.abs(logGamma(x) - value)).toBeLessThan(1e-14 * Math.max(10, Math.abs(value)))
    }
  })

  it('refuses what is no probability or no shape', () => {
    expect(() => incompleteBeta(1.1, 1, 1)).toThrow('x must be between 0 and 1; it is 1.1')
    expect(() => incompleteBeta(0.5, NaN, 1)).toThrow('a must be a number greater than 0; it is NaN')
    expect(() => inverseIncompleteBeta(-0.1, 1, 1)).toThrow('p must be between 0 and 1; it is -0.1')
    expect(() => studentQuantile(0.9, 0)).toThrow('degrees of freedom must be a number greater than 0; it is 0')
  })
})
