import { describe, expect, it } from 'vitest'
import {
  columnsOf,
  emptyLayers,
  indexOfId,
  layersFromColumns,
  lift,
  lowerBound,
  markAt,
  move,
  nearest,
  nextLayerId,
  place,
  range,
  remark,
} from '../../../src/document/layerSet.ts'
import type { LayerSet } from '../../../src/document/layerSet.ts'

function setAt(...positions: number[]): LayerSet {
  return layersFromColumns({
    id: positions.map((_, i) => i + 1),
    position: positions,
    mark: positions.map(() => 'certain'),
    origin: positions.map(() => 7),
  })
}

const one = (id: number, position: number) => ({
  id: [id],
  position: [position],
  mark: ['doubtful' as const],
  origin: [8],
})

describe('finding boundaries', () => {
  const set = setAt(10, 20, 30)
  it('finds the nearest, the younger of two equally near, and none in an empty set', () => {
    expect([-5, 10, 14.9, 15, 15.1, 99].map((position) => nearest(set, position))).toEqual([0, 0, 0, 0, 1, 2])
    expect(nearest(emptyLayers, 5)).toBe(-1)
  })

  it('finds the first at or below a place', () => {
    expect([0, 10, 10.1, 30, 31].map((position) => lowerBound(set, position))).toEqual([0, 0, 1, 2, 3])
  })

  it('takes the young edge of a range in and leaves the old one out', () => {
    expect(range(set, 10, 30)).toEqual([0, 2])
    expect(range(set, 11, 12)).toEqual([1, 1])
    expect(range(set, 30, 10)).toEqual([2, 2])
  })

  it('finds by id wherever the boundary lies', () => {
    expect(indexOfId(place(set, one(9, 15)), 9)).toBe(1)
    expect(indexOfId(set, 9)).toBe(-1)
    expect(nextLayerId(place(set, one(9, 15)))).toBe(10)
    expect(nextLayerId(emptyLayers)).toBe(1)
  })
})

describe('editing boundaries', () => {
  const set = setAt(10, 20, 30)

  it('never changes the set it was given', () => {
    const before = columnsOf(set)
    place(set, one(4, 25))
    lift(set, [2])
    move(set, [2], [21], [8])
    remark(set, [2], ['rejected'], [8])
    expect(columnsOf(set)).toEqual(before)
  })

  it('places several where they belong', () => {
    const placed = place(set, {
      id: [7, 8, 9],
      position: [5, 15, 35],
      mark: ['certain', 'doubtful', 'rejected'],
      origin: [8, 8, 8],
    })
    expect(columnsOf(placed)).toEqual({
      id: [7, 1, 8, 2, 3, 9],
      position: [5, 10, 15, 20, 30, 35],
      mark: ['certain', 'certain', 'doubtful', 'certain', 'certain', 'rejected'],
      origin: [8, 7, 8, 7, 7, 8],
    })
  })

  it('keeps boundaries a quarter of a pixel apart, on either side and among the new ones', () => {
    const message = (position: string, other: string) =>
      `a boundary at ${position} px would lie on the one at ${other} px; ` +
      'boundaries must be 0.25 px apart and in order: move or remove that one first'
    expect(() => place(set, one(4, 20.2))).toThrow(message('20.20', '20.00'))
    expect(() => place(set, one(4, 19.8))).toThrow(message('19.80', '20.00'))
    expect(() => place(set, { ...one(4, 15), id: [4, 5], position: [15, 15.1] })).toThrow(message('15.10', '15.00'))
    expect(() => move(set, [2], [29.9], [8])).toThrow(message('29.90', '30.00'))
    expect(columnsOf(place(set, one(4, 20.25))).position).toEqual([10, 20, 20.25, 30])
  })

  it('refuses an id that is taken, unknown or named twice, and a position that is no number', () => {
    expect(() => place(set, one(2, 25))).toThrow('boundary 2 is already in this count')
    expect(() => place(set, { ...one(4, 15), id: [4, 4], position: [15, 16] })).toThrow(
      'boundary 4 is already in this count',
    )
    expect(() => lift(set, [5])).toThrow('boundary 5 is not in this count, or is named twice')
    expect(() => lift(set, [2, 2])).toThrow('boundary 2 is not in this count, or is named twice')
    expect(() => place(set, one(4, NaN))).toThrow("a boundary's position must be a finite number; it is NaN")
    expect(() => move(setAt(10), [1], [NaN], [8])).toThrow("a boundary's position must be a finite number; it is NaN")
  })

  it('lets boundaries pass one another and keeps what belongs to each', () => {
    const moved = move(set, [1, 3], [32, 12], [8, 9])
    expect(columnsOf(moved)).toEqual({
      id: [3, 2, 1],
      position: [12, 20, 32],
      mark: ['certain', 'certain', 'certain'],
      origin: [9, 7, 8],
    })
  })

  it('shares the columns that an edit leaves alone', () => {
    const moved = move(set, [2], [21], [8])
    expect(moved.id).toBe(set.id)
    expect(moved.mark).toBe(set.mark)
    const marked = remark(set, [2], ['doubtful'], [8])
    expect(marked.position).toBe(set.position)
    expect(markAt(marked, 1)).toBe('doubtful')
  })

  it('writes no negative zero', () => {
    expect(Object.is(place(emptyLayers, one(1, -0)).position[0], 0)).toBe(true)
  })
})
