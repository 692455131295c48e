import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { calibrate } from '../../worker/core/calibrate.ts'
import { parseCurve } from '../../worker/core/curveFile.ts'
import { builtInCurve, curveValueAt, joinPostBomb, yearlyCurve } from '../../worker/core/curve.ts'
import { CurveShelf } from '../../worker/core/curveShelf.ts'
import { intcal20Nodes, intcal20NodesSha256 } from '../../worker/core/intcal20Nodes.ts'

const name = { name: 'mine.14c', sha256: 'abc' }
const rows = '# a comment\n#CAL BP, 14C age,Sigma,Delta 14C,Sigma\n30,150,12,1,1\n10,170,10,1,1\n20,140,11,1,1\n'
const refusal = (text: string) => {
  try {
    parseCurve(text, name)
  } catch (error) {
    return (error as Error).message
  }
  return 'accepted'
}

describe('the built-in curve', () => {
  it('has 2,005 of the published rows, is labelled as reduced, and is named by the hash of its figures', () => {
    const curve = builtInCurve()
    expect(curve.calBP.length).toBe(2005)
    expect([curve.calBP[0], curve.calBP[2004]]).toEqual([0, 55_000])
    expect(curve.reduced).toBe(true)
    expect(curve.name).toBe('IntCal20, reduced table')
    expect(curve.citation).toContain('CC BY 4.0')
    expect(createHash('sha256').update(intcal20Nodes.trim()).digest('hex')).toBe(intcal20NodesSha256)
  })
})

describe('a curve file', () => {
  it('is read in any order, with comments and further columns, and sorted young to old', () => {
    const curve = parseCurve(rows, name)
    expect([...curve.calBP]).toEqual([10, 20, 30])
    expect([...curve.value]).toEqual([170, 140, 150])
    expect([...curve.sigma]).toEqual([10, 11, 12])
    expect(curve).toMatchObject({ name: 'mine.14c', sha256: 'abc', quantity: 'age', reduced: false })
    expect(curve.citation).toContain('a comment')
  })

  it('is a straight line between rows, reversals and all, and nothing beyond them', () => {
    const curve = parseCurve(rows, name)
    expect(curveValueAt(curve, 15)).toEqual({ value: 155, sigma: 10.5 })
    expect(curveValueAt(curve, 27)).toEqual({ value: 147, sigma: 11.7 })
    expect(curveValueAt(curve, 30)).toEqual({ value: 150, sigma: 12 })
    expect(() => curveValueAt(curve, 9.9)).toThrow('mine.14c runs from 10 to 30 cal BP; it says nothing at 9.9 cal BP')
    expect(() => curveValueAt(curve, NaN)).toThrow('it says nothing at NaN cal BP')
    const years = yearlyCurve(curve)
    expect(years.from).toBe(10)
    expect([...years.age]).toEqual([
      170, 167, 164, 161, 158, 155, 152, 149, 146, 143, 140, 141, 142, 143, 144, 145, 146, 147, 148, 149, 150,
    ])
  })

  it('names its columns if it likes', () => {
    const curve = parseCurve('cal_bp,c14_age,sigma\n1,2,3\n4,5,6\n', name)
    expect([...curve.calBP]).toEqual([1, 4])
    expect(refusal('depth,c14_age,sigma\n1,2,3\n')).toContain(
      'the column names "depth,c14_age,sigma" are not understood',
    )
  })

  it('of F14C by month becomes year means: 1963 is -13 cal BP; a year cut short is left out', () => {
    const months = Array.from({ length: 30 }, (_, m) => `${1962 + (m + 0.5) / 12},0,0,${1 + m / 100},0.01`)
    const curve = parseCurve(`Year,D14C,D14C.sd,F14C,F14C.sd\n${months.join('\n')}\n`, name)
    expect(curve.quantity).toBe('f14c')
    expect([...curve.calBP]).toEqual([-14, -13, -12])
    expect(curve.value[1]).toBeCloseTo(1.175, 10)
    // Months scatter by .0345 about their mean.
    expect(curve.sigma[1]).toBeCloseTo(Math.hypot(0.01, 0.0345205), 6)
    const short = parseCurve(`Year,D14C,D14C.sd,F14C,F14C.sd\n${months.slice(0, 26).join('\n')}\n`, name)
    expect([...short.calBP]).toEqual([-13, -12])
  })

  it('is refused by row, with what is wrong and where', () => {
    expect(refusal('1,2,3\n4,five,6\n7,8\n9,10,-1\n99999,1,1\n,1,1\n8,8,8\nx,1,1\n')).toBe(
      'mine.14c: row 2: 14C age "five" is not a number; row 3: sigma is missing; row 4: sigma must be greater than 0; it is -1; row 5: cal BP must lie between -250 and 62000; it is 99999; row 6: cal BP is missing; and 1 more rows',
    )
    expect(refusal('1,2,3\n4,5,6\n1,2,3\n')).toBe('mine.14c: row 3: 1 cal BP stands already in row 1')
    expect(refusal('1,2,3\n')).toBe('mine.14c: a curve needs at least two rows; this file has 1')
    expect(refusal('')).toContain('mine.14c holds no rows')
    expect(refusal('1,2,Infinity\n2,3,4\n')).toContain('sigma "Infinity" is not a number')
    expect(refusal('\n'.repeat(300_000))).toContain('a calibration curve has at most 200000 rows')
  })
})

describe('a curve and a post-bomb curve', () => {
  const bomb = parseCurve('cal_bp,F14C,sigma\n-30,1.3,.01\n-10,1.2,.01\n5,.98,.01\n', { name: 'bomb', sha256: 'b' })
  const older = parseCurve('0,200,10\n100,120,10\n', { name: 'old', sha256: 'o' })

  it('are joined where the older one begins', () => {
    const joined = joinPostBomb(older, bomb)
    expect([joined.from, joined.age.length]).toEqual([-30, 131])
    expect(joined.f14c[0]).toBeCloseTo(1.3, 12)
    expect(joined.age[30]).toBe(200)
    expect(joined.sources.map((source) => source.name)).toEqual(['old', 'bomb'])
    const date = calibrate({ quantity: 'f14c', value: 1.25, sigma: 0.005 }, joined)
    expect(date.mode).toBe(-20)
  })

  it('are refused where a gap lies between them or nothing is added', () => {
    const late = parseCurve('50,200,10\n100,120,10\n', { name: 'late', sha256: 'l' })
    expect(() => joinPostBomb(late, bomb)).toThrow(
      'bomb ends at 5 cal BP and leaves a gap before late, which begins at 50 cal BP',
    )
    const deep = parseCurve('-40,0,10\n100,120,10\n', { name: 'deep', sha256: 'd' })
    expect(() => joinPostBomb(deep, bomb)).toThrow('adds nothing younger to deep')
  })

  it('stand on a shelf: the first given curve is the default, the built-in one has a name, unknown names are told', () => {
    const shelf = new CurveShelf([older, bomb])
    expect(shelf.names).toEqual(['old', 'intcal20'])
    expect(shelf.curve(undefined).sources.map((source) => source.name)).toEqual(['old', 'bomb'])
    expect(shelf.curve('intcal20').from).toBe(-30)
    expect(() => shelf.curve('marine')).toThrow('there is no curve "marine"; the curves at hand are old, intcal20')
    expect(() => new CurveShelf([bomb, bomb])).toThrow(
      'only one post-bomb curve can be used at a time; there are bomb, bomb',
    )
  })
})

describe('a date', () => {
  const curve = yearlyCurve(builtInCurve())

  it('beyond the curve is refused; one that runs over its end is cut and said to be', () => {
    expect(() => calibrate({ quantity: 'age', value: 60_000, sigma: 300 }, curve)).toThrow(
      '60000 ± 300 14C a lies beyond the curve (IntCal20, reduced table, 0 to 55000 cal BP)',
    )
    expect(() => calibrate({ quantity: 'f14c', value: 1.2, sigma: 0.004 }, curve)).toThrow(
      'dates after 1950 need a post-bomb curve',
    )
    expect(calibrate({ quantity: 'age', value: 50_000, sigma: 900 }, curve).cutAt).toBe('old end')
    expect(calibrate({ quantity: 'age', value: 180, sigma: 20 }, curve).cutAt).toBe('young end')
    expect(calibrate({ quantity: 'age', value: 4500, sigma: 30 }, curve).cutAt).toBeNull()
  })

  it('without an error, or with a negative one, is refused', () => {
    expect(() => calibrate({ quantity: 'age', value: 1000, sigma: 0 }, curve)).toThrow(
      'sigma must be a number greater than 0; it is 0',
    )
    expect(() => calibrate({ quantity: 'age', value: 1000, sigma: 30, offsetSigma: -1 }, curve)).toThrow(
      'offset sigma must be',
    )
    expect(() => calibrate({ quantity: 'age', value: NaN, sigma: 30 }, curve)).toThrow(
      'value must be a finite number; it is NaN',
    )
  })
})
