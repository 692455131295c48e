import { describe, expect, it } from 'vitest'
import {
  absent,
  alignCounts,
  certain,
  defaultAlignment,
  doubtful,
  localThickness,
  unseen,
} from '../../worker/core/alignment.ts'
import type { CounterMarks } from '../../worker/core/counterMarks.ts'

const counter = (name: string, position: number[], range: CounterMarks['range'] = null): CounterMarks => ({
  name,
  position: Float64Array.from(position),
  doubtful: new Uint8Array(position.length),
  range,
})
const every10 = (layers: number) => Array.from({ length: layers }, (_, i) => 10 * (i + 1))
const labelsAt = (alignment: ReturnType<typeof alignCounts>, near: number) => {
  const k = alignment.counters.length
  const sites = [...alignment.position.keys()].filter((s) => Math.abs(alignment.position[s] - near) < 4.9)
  return sites.map((s) => [...alignment.label.subarray(s * k, (s + 1) * k)])
}

describe('alignCounts', () => {
  it('joins marks within the tolerance of the local thickness and keeps others apart', () => {
    const b = every10(20).map((x, i) => (i === 5 ? x + 3.9 : i === 10 ? x + 4.1 : x))
    const alignment = alignCounts([counter('A', every10(20)), counter('B', b)])
    expect(alignment.position.length).toBe(21)
    expect(labelsAt(alignment, 60)).toEqual([[certain, certain]])
    expect(labelsAt(alignment, 112)).toEqual([
      [certain, absent],
      [absent, certain],
    ])
  })

  it('keeps a boundary of four counters whole when two of them also set a false mark beside it', () => {
    const counts = [
      counter(
        'A',
        [...every10(20), 107].sort((a, b) => a - b),
      ),
      counter('B', every10(20)),
      counter('C', every10(20)),
      counter(
        'D',
        [...every10(20), 113].sort((a, b) => a - b),
      ),
    ]
    expect(labelsAt(alignCounts(counts), 110)).toEqual([
      [certain, absent, absent, absent],
      [certain, certain, certain, certain],
      [absent, absent, absent, certain],
    ])
  })

  it('takes doubt from the mark itself', () => {
    const a = { ...counter('A', every10(3)), doubtful: Uint8Array.of(0, 1, 0) }
    expect([...alignCounts([a]).label]).toEqual([certain, doubtful, certain])
  })

  it('calls a site unseen, not absent, by a counter who did not look there', () => {
    const alignment = alignCounts([counter('A', every10(20)), counter('B', every10(10), { from: 0, to: 105 })])
    expect(labelsAt(alignment, 100)).toEqual([[certain, certain]])
    expect(labelsAt(alignment, 110)).toEqual([[certain, unseen]])
  })

  it('follows the thickness: what is one boundary where layers are thick is two where they are thin', () => {
    const thin = Array.from({ length: 40 }, (_, i) => 2 + 2 * i)
    const thick = Array.from({ length: 40 }, (_, i) => 100 + 20 * i)
    const shifted = [...thin, ...thick].map((x, i) => (i === 20 || i === 60 ? x + 1.2 : x))
    const alignment = alignCounts([counter('A', [...thin, ...thick]), counter('B', shifted)])
    expect(labelsAt(alignment, 42).length).toBe(2 + 4)
    expect(labelsAt(alignment, 500).length).toBe(1)
  })

  it('aligns 20,000 boundaries by five counters, and counts that agree give one site each', () => {
    const counts = ['A', 'B', 'C', 'D', 'E'].map((name, k) =>
      counter(
        name,
        every10(20_000).map((x) => x + k / 4),
      ),
    )
    const alignment = alignCounts(counts)
    expect(alignment.position.length).toBe(20_000)
    expect(alignment.label.every((label) => label === certain)).toBe(true)
  })

  it('cuts a knot of hopeless marks rather than never ending', () => {
    const noise = (seed: number) => every10(300).map((x, i) => x / 4 + ((i * seed) % 7) / 3)
    const counts = [3, 5, 11, 13].map((seed) =>
      counter(
        `counter ${seed}`,
        noise(seed).sort((a, b) => a - b),
      ),
    )
    const alignment = alignCounts(
      counts.map((one) => ({
        ...one,
        position: Float64Array.from(new Set(one.position)),
        doubtful: new Uint8Array(new Set(one.position).size),
      })),
      { ...defaultAlignment, tolerance: 3 },
    )
    expect(alignment.position.length).toBeGreaterThanOrEqual(300)
  })

  it('refuses bad rows, naming the counter, the first bad row and how many more there are', () => {
    const align = (position: number[]) => () => alignCounts([counter('A', every10(3)), counter('B', position)])
    expect(align([10, NaN, 30])).toThrow('count of B, row 2: position must be a finite number; it is NaN')
    expect(align([10, 10, 30])).toThrow(
      'count of B, row 2: position 10 is given twice, as in row 1; remove one of them',
    )
    expect(align([10, 30, 20, Infinity, 20])).toThrow(
      'count of B, row 3: position 20 lies above 30 in row 2; rows must run downcore; 2 more rows are wrong',
    )
    expect(align([])).toThrow('the count of B holds no boundary; leave it out of the comparison')
  })

  it('refuses ranges that do not hold the marks, marks without doubts, and counts without a thickness', () => {
    expect(() => alignCounts([counter('A', every10(3), { from: 15, to: 40 })])).toThrow(
      'the range of A, 15 to 40, must hold all of the boundaries, 10 to 30',
    )
    expect(() => alignCounts([counter('A', every10(3), { from: NaN, to: 40 })])).toThrow(
      'range of A must be a finite number; it is NaN',
    )
    expect(() => alignCounts([{ ...counter('A', every10(3)), doubtful: new Uint8Array(2) }])).toThrow(
      'the count of A must mark each of its 3 boundaries; it marks 2',
    )
    expect(() => alignCounts([counter('A', [10]), counter('B', [11])])).toThrow(
      'at least one count must hold two boundaries',
    )
    expect(() => alignCounts([counter('A', every10(3))], { tolerance: NaN, thicknessWindow: 8 })).toThrow(
      'tolerance must be a number greater than 0; it is NaN',
    )
    expect(() => alignCounts([])).toThrow('number of counts must be a whole number from 1 to 12; it is 0')
  })
})

describe('localThickness', () => {
  it('is the median spacing around, which neither a missed nor a false mark moves', () => {
    const marks = every10(60).filter((_, i) => i !== 30)
    marks.push(455)
    marks.sort((a, b) => a - b)
    const thickness = localThickness([counter('A', marks)], Float64Array.of(10, 310, 452, 600), 8)
    expect([...thickness]).toEqual([10, 10, 10, 10])
  })
})
