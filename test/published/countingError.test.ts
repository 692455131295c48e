import { describe, expect, it } from 'vitest'
import { captureRecapture, chaoLowerBound } from '../../worker/core/captureRecapture.ts'
import {
  halfLayerError,
  missDoubleCorrected,
  missDoubleCount,
  qualityClassError,
  repeatCountError,
  sectionError,
} from '../../worker/core/countingError.ts'
import { cohenKappa, fleissKappa } from '../../worker/core/kappa.ts'

/** Figures that follow from a formula: they must come back to the last digit quoted. */
const near = (value: number | null, expected: number, tolerance = 1e-6) =>
  expect(Math.abs((value ?? NaN) - expected)).toBeLessThan(tolerance)

describe('half-layer rule: Rasmussen et al. 2006, JGR 111, D06102; Andersen et al. 2006, QSR 25, 3246', () => {
  it('1000 certain and 60 doubtful layers: 1030 +- 30, or 15 at one sigma, or 3.872983 if independent (derived, 1e-6)', () => {
    const error = halfLayerError(1000, 60)
    expect([error.years, error.mce, error.sigma]).toEqual([1030, 30, 15])
    near(error.independentSd, 3.872983)
  })

  /** age b2k, maximum counting error: rows of the GICC05modelext file of 19 Nov 2010. */
  const gicc05: [number, number][] = [
    [7900, 41],
    [11680, 98],
    [11700, 99],
    [11720, 99],
    [14680, 185],
    [14700, 186],
    [28900, 898],
    [38220, 1449],
    [46860, 1912],
    [55380, 2367],
    [59440, 2573],
  ]
  const mceAt = (age: number) => gicc05.find(([row]) => row === age)![1]

  it('MCE read as 2 sigma gives the 1 sigma errors published for 46.9, 55.4 and 59.4 ka b2k (Svensson et al. 2008: 1.0, 1.2, 1.3 ka)', () => {
    // Tolerance 50 a: the abstract rounds to 0.1 ka.
    for (const [age, published] of [
      [46860, 1000],
      [55380, 1200],
      [59440, 1300],
    ] as const) {
      near(halfLayerError(0, 2 * mceAt(age)).sigma, published, 50)
    }
  })

  it('the error of an interval is the difference of the cumulative errors, because the rule is linear (0.001 %)', () => {
    const percent = (young: number, old: number) => {
      const interval = halfLayerError(0, 2 * (mceAt(old) - mceAt(young)))
      return (100 * interval.mce) / (old - young)
    }
    near(percent(7900, 11700), 1.526, 1e-3)
    near(percent(11700, 14700), 2.9, 1e-3)
    near(percent(28900, 38220), 5.912, 1e-3)
  })
})

describe('repeat counts: mean, SD, RMS, SE, percent, half-range, asymmetric', () => {
  it('counts 1012, 1025, 998, 1020, 1005 (recomputed with numpy, 1e-6)', () => {
    const error = repeatCountError([1012, 1025, 998, 1020, 1005])
    expect([error.mean, error.median, error.halfRange, error.range]).toEqual([1012, 1012, 13.5, 27])
    near(error.sd, 10.931606)
    near(error.rms, 9.777525)
    near(error.se, 4.888763)
    near(error.percent.sd, 1.080198)
    near(error.percent.rms, 0.966158)
    near(error.halfWidth95, 13.573381)
    expect([error.asymmetric.plus, error.asymmetric.minus]).toEqual([13, 14])
  })

  it('Lake Zabinskie, one 2000-year record by three methods (Zarczynski, Tylmann & Goslar: 1943 +- 30, 2034 +- 34, 2028 +34/-53; derived percents, 1e-3)', () => {
    near(repeatCountError([1913, 1943, 1973]).percent.sd, 1.544, 1e-3)
    near(repeatCountError([2000, 2034, 2068]).percent.sd, 1.672, 1e-3)
    const { asymmetric } = repeatCountError([2062, 2028, 1975], 2028)
    near(asymmetric.percentPlus, 1.677, 1e-3)
    near(asymmetric.percentMinus, 2.613, 1e-3)
  })

  it('3137 varve years, 2753 to 3375 (Arcusa et al. 2022, Geochronology 4, 409: given as 13 % to +7 %; derived, 1e-3)', () => {
    const { asymmetric } = repeatCountError([2753, 3137, 3375], 3137)
    near(asymmetric.percentMinus, 12.241, 1e-3)
    near(asymmetric.percentPlus, 7.587, 1e-3)
  })
})

describe('sections between marker layers', () => {
  it('e = 4, 3, 6, 2, 5 on n = 200, 180, 250, 150, 220 (recomputed with numpy, 1e-6)', () => {
    const error = sectionError([4, 3, 6, 2, 5], [200, 180, 250, 150, 220], 0.5)
    near(error.linear, 20)
    near(error.percent.linear, 2)
    near(error.independent, 9.486833)
    near(error.percent.independent, 0.948683)
    near(error.correlated, 15.652476)
    near(error.rmsRelativePercent, 1.973872)
  })
})

describe('probability models of single layers', () => {
  it('quality classes: 900 at 1, 80 at 0.9, 40 at 0.5, 20 at 0.1 (recomputed with numpy, 1e-6)', () => {
    const classes = qualityClassError([
      { layers: 900, probability: 1 },
      { layers: 80, probability: 0.9 },
      { layers: 40, probability: 0.5 },
      { layers: 20, probability: 0.1 },
    ])
    near(classes.years, 994)
    near(classes.variance, 19)
    near(classes.sd, 4.358899)
  })

  it('1000 years missed with 0.05 and doubled with 0.02 are counted as 970 +- 8.312641, which corrects to 1000 (1e-6)', () => {
    const expected = missDoubleCount(1000, 0.05, 0.02)
    near(expected.count, 970)
    near(expected.variance, 69.1)
    near(expected.sd, 8.312641)
    near(missDoubleCorrected(970, 0.05, 0.02), 1000)
  })
})

describe('capture and recapture: Chapman 1951; formulas as in mark-recapture manuals (recomputed with numpy, 1e-4)', () => {
  it('n1 = n2 = 100, 20 matched', () => {
    const { lincolnPetersen, chapman } = captureRecapture(100, 100, 20)
    near(lincolnPetersen.years, 500, 1e-4)
    near(lincolnPetersen.sd, 100, 1e-4)
    near(chapman.years, 484.761905, 1e-4)
    near(chapman.sd ** 2, 6729.1692, 1e-4)
    near(chapman.sd, 82.0315, 1e-4)
    near(chapman.interval95[0], 323.98, 5e-3)
    near(chapman.interval95[1], 645.54, 5e-3)
  })

  it.each([
    [10, 15, 5, 30, 28.333333, 5.909368],
    [980, 1005, 960, 1025.9375, 1025.9365, 0.9999],
    [48, 50, 45, 53.3333, 53.3261, 0.6139],
  ])('%d and %d marked, %d matched: %d and %d +- %d', (n1, n2, matched, plain, years, sd) => {
    const estimate = captureRecapture(n1, n2, matched)
    near(estimate.lincolnPetersen.years, plain, 1e-4)
    near(estimate.chapman.years, years, 1e-4)
    near(estimate.chapman.sd, sd, 1e-4)
  })

  it('Chao 1987: 101 seen, 12 once, 19 twice: at least 104.789474, bias-corrected 104.3 (1e-6)', () => {
    const { lowerBound, biasCorrected } = chaoLowerBound(101, 12, 19)
    near(lowerBound, 104.789474)
    near(biasCorrected, 104.3)
  })
})

describe('kappa: Cohen 1960 and 1968, errors by Fleiss, Cohen & Everitt 1969; Fleiss 1971', () => {
  const table = [
    [0, 4, 1],
    [0, 8, 0],
    [0, 1, 5],
  ]

  it('unweighted, as printed in the test data of a statistics package (1e-4)', () => {
    const { po, pe, kappa, ase, interval95, ase0, z } = cohenKappa(table)
    near(po, 0.684211)
    near(pe, 0.387812)
    near(kappa, 0.484163)
    near(ase, 0.138, 1e-4)
    near(interval95[0], 0.2137, 1e-4)
    near(interval95[1], 0.7547, 1e-4)
    near(ase0, 0.1484, 1e-4)
    near(z, 3.2626, 1e-3)
  })

  it('linear weights, from the same printout (1e-4)', () => {
    const { kappa, ase, interval95, ase0, z } = cohenKappa(table, 'linear')
    near(kappa, 0.47012)
    near(ase, 0.1457, 1e-4)
    near(interval95[0], 0.1845, 1e-4)
    near(interval95[1], 0.7558, 1e-4)
    near(ase0, 0.1426, 1e-4)
    near(z, 3.2971, 1e-3)
  })

  it('warns of the paradox of high agreement and low kappa, and only of it (recomputed, 1e-6)', () => {
    const plain = cohenKappa([
      [20, 5],
      [10, 15],
    ])
    near(plain.po, 0.7)
    near(plain.pe, 0.5)
    near(plain.kappa, 0.4)
    expect(plain.paradox).toBeNull()
    const paradox = cohenKappa([
      [85, 7],
      [5, 3],
    ])
    near(paradox.po, 0.88)
    near(paradox.pe, 0.836)
    near(paradox.kappa, 0.268293)
    expect(paradox.paradox).toContain('88.0 % agreement, 83.6 % of it expected by chance')
  })

  it('Fleiss: ten items by fourteen raters (published .210; 1e-6)', () => {
    const ratings =
      '0 0 0 0 14/0 2 6 4 2/0 0 3 5 6/0 3 9 2 0/2 2 8 1 1/7 7 0 0 0/3 2 6 3 0/2 5 3 2 2/6 5 2 1 0/0 2 2 3 7'
    const { meanAgreement, chanceAgreement, kappa } = fleissKappa(
      ratings.split('/').map((row) => row.split(' ').map(Number)),
    )
    near(meanAgreement, 0.378022)
    near(chanceAgreement, 0.212755)
    near(kappa, 0.209931)
  })
})
