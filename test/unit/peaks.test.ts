import { describe, expect, it } from 'vitest'
import { findPeaks, keepDistant, parabolaVertex } from '../../worker/core/peaks.ts'

const column = (...values: number[]) => Float64Array.from(values)

describe('findPeaks', () => {
  it('takes a plateau as one peak at its middle, rounded down, and none that touches an end', () => {
    expect([...findPeaks(column(0, 2, 2, 2, 0, 3, 3, 0)).index]).toEqual([2, 5])
    expect([...findPeaks(column(2, 2, 1, 0, 1, 2)).index]).toEqual([])
    expect([...findPeaks(column(1, 1, 1)).index]).toEqual([])
    expect([...findPeaks(column()).index]).toEqual([])
  })

  it('leaves the lower of two peaks that are too close, and of two equal ones the earlier', () => {
    expect([...findPeaks(column(0, 3, 0, 2, 0, 1, 0), { distance: 3 }).index]).toEqual([1, 5])
    expect([...findPeaks(column(0, 2, 0, 2, 0), { distance: 3 }).index]).toEqual([3])
    // What falls no longer counts: the lowest is far enough from the highest once the one between has gone.
    expect([...findPeaks(column(0, 3, 0, 2, 0, 1, 0), { distance: 4 }).index]).toEqual([1, 5])
  })

  it('lets a gap end a flank like a higher sample, and finds no peak beside it', () => {
    const { index, prominence, leftBase } = findPeaks(column(0, 9, NaN, 3, 5, 2, 4, 1))
    expect([...index]).toEqual([4, 6])
    expect([...prominence]).toEqual([2, 2])
    expect([...leftBase]).toEqual([3, 5])
  })

  it('measures widths between the crossings of the level by straight lines', () => {
    const { width, leftEdge, rightEdge } = findPeaks(column(0, 1, 4, 2, 0), { relHeight: 0.5 })
    expect(leftEdge[0]).toBeCloseTo(4 / 3, 12)
    expect(rightEdge[0]).toBe(3)
    expect(width[0]).toBeCloseTo(5 / 3, 12)
  })

  it('measures a long rise of peaks in time proportional to its length', () => {
    // 200,000 peaks, each higher than all before it: walking out from each would take 10^10 steps.
    const rising = Float64Array.from({ length: 400_000 }, (_, i) => i + (i % 2 === 0 ? 0 : 1.5))
    const { index, prominence } = findPeaks(rising)
    expect(index.length).toBe(199_999)
    expect(prominence[100]).toBeCloseTo(0.5, 9)
  })

  it('refuses a distance or a relative height that makes no sense', () => {
    expect(() => findPeaks(column(0, 1, 0), { distance: NaN })).toThrow(
      'distance must be a number greater than 0; it is NaN',
    )
    expect(() => findPeaks(column(0, 1, 0), { relHeight: 1.5 })).toThrow('relHeight must be between 0 and 1; it is 1.5')
  })
})

describe('keepDistant', () => {
  it('asks each peak that stays for its own distance', () => {
    const kept = keepDistant([0, 4, 8, 12], Float64Array.from([1, 2, 3, 4]), (peak) => (peak === 3 ? 5 : 3))
    expect([...kept]).toEqual([1, 1, 0, 1])
  })
})

describe('parabolaVertex', () => {
  it('stays where it is beside a gap, on a straight line, and where the middle is no summit', () => {
    expect(parabolaVertex(NaN, 5, 4)).toEqual({ offset: 0, height: 5 })
    expect(parabolaVertex(1, 2, 3)).toEqual({ offset: 0, height: 2 })
    expect(parabolaVertex(5, 1, 5)).toEqual({ offset: 0, height: 1 })
  })
})
