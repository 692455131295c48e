import { describe, expect, it } from 'vitest'
import { compareCounts } from '../../worker/core/counts.ts'
import { finish } from '../../worker/work.ts'
import { readCountTable } from '../../worker/core/countTable.ts'

const counter = (name: string, position: number[], doubtful: number[] = []) => ({
  name,
  position: Float64Array.from(position),
  doubtful: Uint8Array.from(position, (_, i) => (doubtful.includes(i) ? 1 : 0)),
  range: null,
})
const years = (n: number, without: number[] = []) =>
  Array.from({ length: n }, (_, i) => 10 * (i + 1)).filter((_, i) => !without.includes(i))

describe('repeat counts side by side', () => {
  const agreement = finish(
    compareCounts([
      counter('A', years(20), [3]),
      counter(
        'B',
        years(20, [7]).map((p) => p + 0.5),
      ),
      counter(
        'C',
        [...years(20), 155].sort((a, b) => a - b),
      ),
    ]),
  )

  it('find each counter’s total, doubtful layers as one half', () => {
    expect(agreement.totals.map(({ halfLayer }) => halfLayer.years)).toEqual([19.5, 19, 21])
    expect(agreement.totals.map(({ halfLayer }) => halfLayer.mce)).toEqual([0.5, 0, 0])
    expect(agreement.spread.mean).toBeCloseTo(59.5 / 3, 12)
  })

  it('list the sites that not all marked: the one B missed and the one C alone set', () => {
    expect([...agreement.disputed].map((site) => Math.round(agreement.alignment.position[site]))).toEqual([80, 155])
    expect(agreement.alignment.position.length).toBe(21)
  })

  it('count what each pair shares', () => {
    expect(
      agreement.pairs.map(({ first, second, both, onlyFirst, onlySecond }) => [
        first,
        second,
        both,
        onlyFirst,
        onlySecond,
      ]),
    ).toEqual([
      ['A', 'B', 19, 1, 0],
      ['A', 'C', 20, 0, 1],
      ['B', 'C', 19, 0, 2],
    ])
  })

  it('keep each counter’s own position, NaN where absent', () => {
    const site = agreement.disputed[0]
    expect([...agreement.own.subarray(site * 3, site * 3 + 3)]).toEqual([80, NaN, 80])
  })
})

describe('a table of a count', () => {
  it('is read with its lines, marks in any case, and depth alone where no mark is asked for', () => {
    const table = readCountTable('depth_mm,mark\n1.5,certain\n\n2.5,Doubtful\n', 'b.csv')
    expect(table.errors).toEqual([])
    expect(table.rows).toEqual([
      { line: 2, depthMm: 1.5, mark: 'certain' },
      { line: 4, depthMm: 2.5, mark: 'doubtful' },
    ])
    expect(readCountTable('z\n1\n2\n', 'b.csv', { depth: 'z', mark: null }).rows.length).toBe(2)
  })

  it('names every bad row: NaN, empty, repeated, reversed, unknown mark', () => {
    const { errors } = readCountTable(
      'depth_mm,mark\n1,certain\nNaN,certain\n,certain\n1,certain\n0.5,perhaps\n',
      'b.csv',
    )
    expect(errors.map(({ row, column }) => `${row} ${column}`)).toEqual([
      '3 depth_mm',
      '4 depth_mm',
      '5 depth_mm',
      '6 depth_mm',
      '6 mark',
    ])
  })

  it('of 100,000 rows with NaN, duplicates and reversed depths names them all', () => {
    const depth = Array.from({ length: 100_000 }, (_, i) => String(i * 0.8))
    depth[500] = 'NaN'
    depth[70_000] = depth[69_999]
    depth[90_000] = '3'
    const { errors, rows } = readCountTable(
      `depth_mm,mark\n${depth.map((d) => `${d},certain`).join('\n')}\n`,
      'big.csv',
    )
    expect(rows.length).toBe(100_000)
    expect(errors.map(({ row }) => row)).toEqual([502, 70_002, 90_002])
  })

  it('without the column says which there are', () => {
    expect(() => readCountTable('a,b\n1,2\n', 'b.csv')).toThrow('b.csv has no column depth_mm; it has a, b')
  })
})
