import { describe, expect, it } from 'vitest'
import { calibrate } from '../../worker/core/calibrate.ts'
import type { Calibration } from '../../worker/core/calibrate.ts'
import { parseCurve } from '../../worker/core/curveFile.ts'
import { builtInCurve, curveValueAt, delta14c, yearlyCurve } from '../../worker/core/curve.ts'
import { normalDensity, studentModel } from '../../worker/core/errorModel.ts'
import type { HpdRange } from '../../worker/core/hpd.ts'
import { wiggleMatch } from '../../worker/core/wiggle.ts'
import type { WiggleMatch } from '../../worker/core/wiggle.ts'
import { fullIntCal20, hasReference, referenceText } from '../fixtures/reference.ts'

const withCurve = hasReference('curves', 'intcal20.14c')
const skipped = withCurve ? '' : ' (skipped: no reference data)'

/** Values were made with numpy and checked by a second program in R on the full table; edges +-2 a, mean and SD +-0.5. */
const near = (value: number, expected: number, tolerance: number, what = '') =>
  expect(Math.abs(value - expected), `${what} ${value} against ${expected}`).toBeLessThanOrEqual(tolerance)

/** Islands of up to 3 a may be merged or left: they hang on the last digit. */
function mainRanges(ranges: readonly HpdRange[]): [number, number][] {
  const merged: [number, number][] = []
  for (const { from, to } of ranges) {
    const last = merged.at(-1)
    if (last && from - last[1] <= 4) last[1] = to
    else merged.push([from, to])
  }
  return merged.filter(([from, to]) => to - from > 2)
}

function expectRanges(ranges: readonly HpdRange[], text: string, tolerance: number): void {
  const expected = text.split(' ').map((pair) => pair.split('-').map(Number))
  const found = mainRanges(ranges)
  expect(found.length, `${JSON.stringify(found)} against ${text}`).toBe(expected.length)
  expected.forEach(([from, to], i) => {
    near(found[i][0], from, tolerance, text)
    near(found[i][1], to, tolerance, text)
  })
}

const published = [
  [1000, 30, 890.4, 49.2, 912, '829-845 857-864 905-936 944-955', '797-869 900-956'],
  [1950, 30, 1875.2, 46.5, 1875, '1830-1893 1903-1923', '1749-1761 1788-1811 1819-1946 1963-1986'],
  [
    2450,
    30,
    2534.9,
    103.7,
    2517,
    '2370-2385 2412-2498 2507-2510 2594-2613 2639-2695',
    '2361-2542 2559-2574 2579-2617 2631-2702',
  ],
  [4500, 30, 5163.1, 79, 5162, '5053-5143 5158-5189 5234-5246 5261-5286', '5045-5301'],
  [5000, 40, 5741.2, 80, 5726, '5611-5617 5657-5751 5827-5856', '5603-5638 5645-5767 5785-5793 5806-5894'],
  [8200, 50, 9162.4, 89.5, 9158, '9029-9054 9085-9144 9174-9264', '9013-9300 9384-9397'],
  [
    10000,
    50,
    11489.3,
    123.1,
    11482,
    '11326-11379 11389-11413 11418-11506 11525-11612',
    '11269-11652 11663-11711 11719-11726',
  ],
  [12350, 40, 14439.5, 206, 14384, '14198-14435 14727-14790', '14145-14558 14689-14827'],
  [20000, 100, 24019, 117.3, 24012, '23876-24120', '23816-24235'],
  [35000, 400, 40156.8, 402.4, 40157, '39738-40567', '39390-40938'],
  [691, 31, 632.5, 39.7, 653, '572-580 649-671', '562-590 632-677'],
] as const

describe.skipIf(!withCurve)(`IntCal20 in full (Reimer et al. 2020)${skipped}`, () => {
  const curve = withCurve ? fullIntCal20() : yearlyCurve(builtInCurve())

  it('rows of the table stand where they were published; the reversals at 5000 and 13,900 cal BP are kept', () => {
    const raw = parseCurve(referenceText('curves', 'intcal20.14c'), { name: 'intcal20.14c', sha256: '' })
    expect(raw.calBP.length).toBe(9501)
    const rows = [
      [0, 199, 11],
      [1000, 1126, 13],
      [5000, 4439, 15],
      [5005, 4432, 16],
      [13900, 12067, 27],
      [13910, 12062, 28],
      [42000, 37241, 172],
      [55000, 50100, 1024],
    ]
    for (const [calBP, value, sigma] of rows) expect(curveValueAt(raw, calBP)).toEqual({ value, sigma })
  })

  it('Delta14C from age and calendar age agrees with the table to .115 permil over 0-12,000 cal BP (rounding of ages)', () => {
    const rows = referenceText('curves', 'intcal20.14c')
      .split('\n')
      .filter((line) => /^\d/.test(line))
      .map((line) => line.split(',').map(Number))
    for (const [calBP, age, , delta] of rows) if (calBP <= 12_000) near(delta14c(age, calBP), delta, 0.1155)
  })

  it('at 5150 cal BP the curve is 4529 +- 14, and 4500 +- 30 has the density .0082107 (1e-6)', () => {
    expect([curve.age[5150], curve.ageSigma[5150]]).toEqual([4529, 14])
    near(normalDensity(4500 - 4529, Math.hypot(30, 14)), 0.0082107, 1e-6)
  })

  it.each(published)(
    '%d +- %d: mean %d, SD %d, median %d, 68.3 %% %s, 95.4 %% %s',
    (value, sigma, mean, sd, median, hpd68, hpd95) => {
      const result = calibrate({ quantity: 'age', value, sigma }, curve)
      near(result.mean, mean, 0.5, 'mean')
      near(result.sd, sd, 0.5, 'SD')
      near(result.median, median, 2, 'median')
      expectRanges(result.hpd68, hpd68, 2)
      expectRanges(result.hpd95, hpd95, 2)
    },
  )

  it('shares of pieces: 2450 +- 30 .546 and .262, 12,350 +- 40 .723 and .231 (.01)', () => {
    const share = (r: Calibration, at: number) =>
      r.hpd95.find(({ from, to }) => from <= at && at <= to)?.probability ?? 0
    const plateau = calibrate({ quantity: 'age', value: 2450, sigma: 30 }, curve)
    near(share(plateau, 2450), 0.546, 0.01)
    near(share(plateau, 2660), 0.262, 0.01)
    const late = calibrate({ quantity: 'age', value: 12_350, sigma: 40 }, curve)
    near(share(late, 14_300), 0.723, 0.01)
    near(share(late, 14_750), 0.231, 0.01)
  })

  it.each([
    [2450, 30, 2535.2, 105.3, '2359-2545 2555-2619 2629-2704'],
    [4500, 30, 5157.9, 89.1, '4980-5007 5036-5308'],
    [10000, 50, 11499.7, 142.8, '11255-11749 11795-11801'],
  ])('Student-t (Christen & Perez 2009): %d +- %d has mean %d, SD %d, 95.4 %% %s', (value, sigma, mean, sd, hpd95) => {
    const result = calibrate({ quantity: 'age', value, sigma, model: studentModel }, curve)
    near(result.mean, mean, 0.5, 'mean')
    near(result.sd, sd, 0.5, 'SD')
    expectRanges(result.hpd95, hpd95, 2)
  })

  it('a reservoir age of 400 +- 50 on 5200 +- 40: 4800 +- 64.031, mean 5510.2, SD 78.0, median 5519', () => {
    const result = calibrate({ quantity: 'age', value: 5200, sigma: 40, offset: 400, offsetSigma: 50 }, curve)
    near(result.mean, 5510.2, 0.5)
    near(result.sd, 78, 0.5)
    near(result.median, 5519, 2)
    expectRanges(result.hpd68, '5475-5590', 2)
    expectRanges(result.hpd95, '5326-5408 5443-5605 5626-5652', 2)
  })

  it('the age and the same measurement as F14C give the same years where errors are small', () => {
    const age = calibrate({ quantity: 'age', value: 4500, sigma: 30 }, curve)
    const f14c = calibrate({ quantity: 'f14c', value: 0.571101, sigma: 0.002133 }, curve)
    near(f14c.mean, age.mean, 0.7)
    near(f14c.median, age.median, 1)
  })
})

/** Floating series on the full curve: years older than the level sought, 14C age, sigma. */
const series = (older: number[], ages: number[], sigmas: number[]) =>
  older.map((years, i) => ({ older: years, age: ages[i], sigma: sigmas[i] }))

function expectMatch(match: WiggleMatch, mode: number, median: number, hpd68: string, hpd95: string): void {
  near(match.mode, mode, 2, 'mode')
  near(match.median, median, 2, 'median')
  expectRanges(match.hpd68, hpd68, 2)
  expectRanges(match.hpd95, hpd95, 2)
}

describe.skipIf(!withCurve)(
  `wiggle matches on IntCal20 in full (Bronk Ramsey, van der Plicht & Weninger 2001)${skipped}`,
  () => {
    const curve = withCurve ? fullIntCal20() : yearlyCurve(builtInCurve())
    const older = [0, -25, -60, -110, -150]
    const window = { from: 5200, to: 6999 }
    const sigmas = Array<number>(5).fill(25)

    it('the olive branch of Santorini (Friedrich et al. 2006; dates from memory, they reproduce the published range): 1617-1586 BC', () => {
      const match = wiggleMatch(series([65, 46.5, 23.5, 6], [3383, 3372, 3349, 3331], [11, 12, 12, 10]), curve, {
        from: 3000,
        to: 3999,
      })
      near(match.mean, 3550, 0.5)
      near(match.sd, 8.7, 0.5)
      near(match.best.chiSquare, 2.518, 0.001)
      expect(match.best.calBP).toBe(3546)
      expectMatch(match, 3546, 3550, '3542-3548 3553-3561', '3535-3566')
    })

    it('without noise: mode 6000, 95.4 % 5991-6013, chi-square 0', () => {
      const match = wiggleMatch(series(older, [5276, 5207, 5218, 5070, 5041], sigmas), curve, window)
      expectMatch(match, 6000, 6001, '5996-6006', '5991-6013')
      expect(match.best).toMatchObject({ calBP: 6000, chiSquare: 0, degrees: 4 })
    })

    it('perturbed: mode 6003, 95.4 % 5995-6015, chi-square .528 at 6004; with Student-t 5992-6017', () => {
      const dates = series(older, [5288, 5187, 5223, 5088, 5032], sigmas)
      const match = wiggleMatch(dates, curve, window)
      expectMatch(match, 6003, 6004, '5999-6009', '5995-6015')
      near(match.best.chiSquare, 0.528, 0.001)
      expect(match.best.calBP).toBe(6004)
      expectRanges(wiggleMatch(dates, curve, window, studentModel).hpd95, '5992-6017', 2)
    })

    it('an outlier of +395 a: the normal model is wrong and narrow (6072-6086), Student-t holds the truth (5992-6020)', () => {
      const dates = series(older, [5288, 5187, 5618, 5088, 5032], sigmas)
      const normal = wiggleMatch(dates, curve, window)
      near(normal.mode, 6075, 2)
      expectRanges(normal.hpd95, '6072-6086', 2)
      near(normal.best.chiSquare, 141.9, 0.1)
      expectMatch(wiggleMatch(dates, curve, window, studentModel), 6005, 6006, '6000-6012', '5992-6020')
    })
  },
)

const withRings = hasReference('wiggle', 'wiggle_araisi.csv')

describe.skipIf(!withRings)(
  `14 rings of one timber that holds the event of 774/775 (Meadows et al. 2023, CC BY)`,
  () => {
    const curves = { full: withCurve ? fullIntCal20() : null, 'built in': yearlyCurve(builtInCurve()) }

    it.each(['full', 'built in'] as const)(
      'ring 0 is of 835 CE, mode and whole 95.4 %% range, on the curve %s',
      (which) => {
        const curve = curves[which]
        if (!curve) throw new Error('the rings are there, but the curve is not')
        const rings = referenceText('wiggle', 'wiggle_araisi.csv')
          .trim()
          .split('\n')
          .slice(1)
          .map((line) => line.split(',').map(Number))
        const match = wiggleMatch(
          rings.map(([ring, , age, sigma]) => ({ older: -ring, age, sigma })),
          curve,
        )
        expect(1950 - match.mode).toBe(835)
        expect(match.hpd95.map(({ from, to }) => [1950 - from, 1950 - to])).toEqual([[835, 835]])
      },
    )
  },
)

describe.skipIf(!withCurve)(`the reduced table against the full one${skipped}`, () => {
  const full = withCurve ? fullIntCal20() : yearlyCurve(builtInCurve())
  const reduced = yearlyCurve(builtInCurve())

  it('stays within 0.1 sigma of it at every year, as it was made (0.103 with interpolated sigma)', () => {
    for (let i = 0; i < full.age.length; i++) {
      near(reduced.age[i], full.age[i], 0.11 * full.ageSigma[i], `${i} cal BP`)
    }
  })

  it('200 dates over 0-50,000: mean and median within 3 % of the SD and 1 a, and its 95.4 % ranges hold 94.5 to 96.3 % by the full table', () => {
    for (let k = 0; k < 200; k++) {
      const value = 125 + 249 * k
      const sigma = Math.round(20 + value / 100)
      const [a, b] = [full, reduced].map((curve) => calibrate({ quantity: 'age', value, sigma }, curve))
      near(b.mean, a.mean, 1 + 0.03 * a.sd, `mean of ${value}`)
      near(b.median, a.median, 1 + 0.03 * a.sd, `median of ${value}`)
      const held = b.hpd95.reduce((sum, { from, to }) => sum + between(a, from, to), 0)
      near(held, 0.954, 0.009, `held by the ranges of ${value}`)
    }
  })
})

function between({ from, probability }: Calibration, low: number, high: number): number {
  let sum = 0
  for (let at = Math.max(from, low); at <= Math.min(high, from + probability.length - 1); at++)
    sum += probability[at - from]
  return sum
}
