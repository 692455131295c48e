import { describe, expect, it } from 'vitest'
import { movingMean, movingMedian } from '../../worker/core/movingWindow.ts'
import { evenCuts, finiteRuns } from '../../worker/core/runs.ts'
import { gaussianSmooth, savitzkyGolay, savitzkyGolayWeights } from '../../worker/core/smoothing.ts'

const column = (...values: number[]) => Float64Array.from(values)
const gap = NaN

describe('runs', () => {
  it('are the stretches between gaps', () => {
    expect(finiteRuns(column(gap, 1, 2, gap, gap, 3))).toEqual([
      { from: 1, to: 3 },
      { from: 5, to: 6 },
    ])
    expect(finiteRuns(column())).toEqual([])
  })

  it('cut evenly, the same from either end', () => {
    expect([...evenCuts(10, 4)]).toEqual([0, 3, 5, 7, 10])
    const cuts = [...evenCuts(203, 9)]
    expect(cuts.toReversed().map((cut) => 203 - cut)).toEqual(cuts)
  })
})

describe('moving windows', () => {
  it('are cut off at the ends, and an even number of values has the mean of the middle two as its median', () => {
    expect([...movingMedian(column(1, 9, 2, 8), 1)]).toEqual([5, 2, 8, 5])
    expect([...movingMean(column(1, 9, 2, 8), 1)]).toEqual([5, 4, 19 / 3, 5])
  })

  it('leave gaps out of their windows and fill none', () => {
    expect([...movingMedian(column(1, gap, 5, 7, gap), 2)]).toEqual([3, gap, 5, 6, gap])
    expect([...movingMean(column(1, gap, 5, 7, gap), 1)]).toEqual([1, gap, 6, 6, gap])
    expect([...movingMedian(column(gap, gap), 1)]).toEqual([gap, gap])
  })

  it('may widen and narrow from row to row', () => {
    expect([...movingMedian(column(5, 1, 4, 2, 3), [0, 1, 2, 1, 0])]).toEqual([5, 4, 3, 3, 3])
    expect([...movingMean(column(5, 1, 4, 2, 3), [0, 1, 2, 0, 9])]).toEqual([5, 10 / 3, 3, 2, 3])
  })

  it('keep the digits of a high, narrow grey range', () => {
    const high = Float64Array.from({ length: 30_000 }, (_, i) => 1e9 + (i % 2))
    for (const mean of movingMean(high, 50)) expect(Math.abs(mean - 1e9 - 0.5)).toBeLessThan(0.02)
    expect(movingMean(high, 0)).toEqual(high)
  })

  it('refuse windows that are no whole number of rows', () => {
    expect(() => movingMedian(column(1, 2), 0.5)).toThrow(
      'half a window must be a whole number of at least 0; at row 0 it is 0.5',
    )
    expect(() => movingMean(column(1, 2), [1])).toThrow(
      'half windows must be as many as there are rows (2); there are 1',
    )
  })
})

describe('Savitzky-Golay', () => {
  it('leaves polynomials of its degree as they are, ends included', () => {
    const cubic = Float64Array.from({ length: 40 }, (_, i) => 2 + i - 0.3 * i ** 2 + 0.01 * i ** 3)
    const smooth = savitzkyGolay(cubic, 11, 3)
    smooth.forEach((value, i) => expect(value).toBeCloseTo(cubic[i], 9))
    const slope = savitzkyGolay(cubic, 11, 3, 1)
    slope.forEach((value, i) => expect(value).toBeCloseTo(1 - 0.6 * i + 0.03 * i ** 2, 9))
  })

  it('stays accurate over long windows: weights sum to 1 and annihilate odd powers', () => {
    const weights = savitzkyGolayWeights(2001, 4)
    expect(weights.reduce((sum, weight) => sum + weight, 0)).toBeCloseTo(1, 12)
    expect(weights.reduce((sum, weight, i) => sum + weight * (i - 1000), 0)).toBeCloseTo(0, 9)
  })

  it('smooths each stretch between gaps by itself, short ones over what they hold', () => {
    const smooth = savitzkyGolay(column(1, 2, gap, 4, 9, 4, 9, 4, gap, 7), 5, 2)
    expect([...smooth.slice(0, 3)]).toEqual([1, 2, gap])
    expect(smooth[9]).toBeCloseTo(7, 12)
    const alone = savitzkyGolay(column(4, 9, 4, 9, 4), 5, 2)
    alone.forEach((value, i) => expect(smooth[3 + i]).toBeCloseTo(value, 12))
  })

  it('wants an odd window', () => {
    expect(() => savitzkyGolay(column(1, 2, 3), 4, 2)).toThrow(
      'the window of a Savitzky-Golay filter must be an odd number of rows; it is 4',
    )
  })
})

describe('Gaussian smoothing', () => {
  it('leaves a constant as it is, at ends and beside gaps too', () => {
    const level = column(3, 3, 3, gap, 3, 3, 3, 3)
    gaussianSmooth(level, 1.5).forEach((value, i) => {
      if (Number.isNaN(level[i])) expect(value).toBeNaN()
      else expect(value).toBeCloseTo(3, 12)
    })
  })

  it('never looks across a gap', () => {
    const smooth = gaussianSmooth(column(0, 0, 0, gap, 100, 100), 5)
    expect([...smooth.slice(0, 3)]).toEqual([0, 0, 0])
    expect(smooth[4]).toBeCloseTo(100, 12)
  })

  it('spreads a pulse as its standard deviation says, which may change from row to row', () => {
    const pulse = new Float64Array(101)
    pulse[50] = 1
    const wide = gaussianSmooth(pulse, 4)
    const variance = wide.reduce((sum, value, i) => sum + value * (i - 50) ** 2, 0)
    expect(Math.sqrt(variance)).toBeCloseTo(4, 1)
    const changing = gaussianSmooth(
      pulse,
      Float64Array.from({ length: 101 }, (_, i) => (i < 50 ? 4 : 1)),
    )
    expect(changing[46] / wide[46]).toBeCloseTo(1, 1)
    expect(changing[55]).toBeLessThan(wide[55] / 50)
  })

  it('refuses a length of nothing', () => {
    expect(() => gaussianSmooth(column(1, 2), 0)).toThrow('smoothing length must be a number greater than 0; it is 0')
  })
})
