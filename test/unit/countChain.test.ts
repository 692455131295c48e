import { describe, expect, it } from 'vitest'
import { chainDefaults, countChain, expectedYears } from '../../worker/core/countChain.ts'
import { layerRowKinds } from '../../worker/core/countedLayers.ts'
import type { CountedLayers, LayerRowKind } from '../../worker/core/countedLayers.ts'
import { SamplePlaces } from '../../worker/core/samplePlace.ts'
import { gapYears, momentsOf, stepLaws } from '../../worker/core/stepLaws.ts'

/** Rows of kind, thickness (mm) and probability, one below the other. */
function layersOf(rows: [LayerRowKind, number, number][]): CountedLayers {
  let depth = 0
  const depths = rows.map(([, thickness]) => {
    const at = depth
    depth += Number.isNaN(thickness) ? 1 : thickness
    return at
  })
  return {
    depth: Float64Array.from(depths),
    thickness: Float64Array.from(rows, ([, thickness]) => thickness),
    probability: Float64Array.from(rows, ([, , probability]) => probability),
    kind: Uint8Array.from(rows, ([kind]) => layerRowKinds.indexOf(kind)),
  }
}

const varves = (n: number): [LayerRowKind, number, number][] => Array.from({ length: n }, () => ['varve', 1, 1])

describe('the chain of a count', () => {
  it('closes a year at the young edge of a layer with its probability; the top layer closes none', () => {
    const chain = countChain(
      layersOf([
        ['varve', 1, 0.3],
        ['varve', 1, 0.9],
        ['varve', 1, 0.6],
      ]),
      chainDefaults,
    )
    expect([...chain.ends]).toEqual([0, 0.9, 0.6])
    expect([...expectedYears(chain)]).toEqual([0, 0.9, 1.5])
  })

  it('gives an event bed no time and the year of the layer above, whatever its probability says', () => {
    const rows: [LayerRowKind, number, number][] = [
      ['event', 5, 1],
      ['varve', 1, 1],
      ['event', 3, 1],
      ['varve', 1, 0.8],
    ]
    expect([...expectedYears(countChain(layersOf(rows), chainDefaults))]).toEqual([0, 0, 0, 0.8])
  })

  it('lets a year that the count placed in unreadable ground pass with its probability', () => {
    const chain = countChain(layersOf([...varves(2), ['unreadable', NaN, 0.7], ...varves(1)]), chainDefaults)
    expect([...chain.ends]).toEqual([0, 1, 0.7, 1])
    expect(chain.gaps.size).toBe(0)
  })

  it('lets a measured unreadable span hold the years that its neighbours say, cut where a date lies in it', () => {
    const rows = layersOf([...varves(10), ['unreadable', 8, 1], ...varves(10)])
    const chain = countChain(rows, chainDefaults)
    expect(chain.gaps.get(11)).toEqual({ kind: 'unreadable', mean: 8, variance: 0 })
    const cut = countChain(rows, chainDefaults, [12, 3])
    expect(cut.levels).toBe(22)
    expect(cut.gaps.get(11)).toMatchObject({ mean: 2 })
    expect(cut.gaps.get(12)).toMatchObject({ mean: 6 })
    expect([...cut.levelOfRow.slice(9, 13)]).toEqual([9, 10, 12, 13])
    expect(expectedYears(cut)[21]).toBe(expectedYears(chain)[20])
  })

  it('lets a hiatus take any number of years of its range', () => {
    const rows = layersOf([...varves(2), ['hiatus', NaN, NaN], ...varves(1)])
    const chain = countChain(rows, { ...chainDefaults, hiatuses: new Map([[2, [5, 9]]]) })
    expect(chain.gaps.get(3)).toEqual({ kind: 'hiatus', from: 5, to: 9 })
    expect(expectedYears(chain)[3]).toBe(8)
    expect(() => countChain(rows, { ...chainDefaults, hiatusYears: [9, 5] })).toThrow(
      'the years lost in a hiatus must be whole numbers from 0 to 20000, the smaller first; they are 9 to 5',
    )
  })

  it('is refused for layers that are none', () => {
    expect(() => countChain(layersOf([]), chainDefaults)).toThrow('there are no layers; count the core first')
    expect(() => countChain(layersOf([['varve', 1, 1.2]]), chainDefaults)).toThrow(
      'probability of row 1 must be between 0 and 1; it is 1.2',
    )
    const upside = { ...layersOf(varves(2)), depth: Float64Array.of(2, 1) }
    expect(() => countChain(upside, chainDefaults)).toThrow(
      'layers must be sorted downcore; row 2 at 1 mm follows 2 mm',
    )
    expect(() => countChain(layersOf([...varves(2), ['unreadable', 3, 1]]), chainDefaults)).toThrow(
      'the unreadable span in row 3 has 2 measured layers around it; at least 5 are needed to say how many years it holds',
    )
  })
})

describe('the law of a step', () => {
  const chain = countChain(
    layersOf([
      ['varve', 1, 1],
      ['varve', 1, 0.9],
      ['varve', 1, 0.5],
    ]),
    { ...chainDefaults, missedRate: 0.05 },
  )

  it.each([0.5, 0.9, 1, 1.1, 1.9, 3.2])('has the expected years of the count times the factor %d', (factor) => {
    const { mean, shift, tap } = stepLaws(chain, factor)
    expect(mean[1]).toBeCloseTo(0.95 * factor, 12)
    expect(mean[2]).toBeCloseTo(1.5 * factor, 12)
    for (const i of [1, 2]) {
      const [a, b, c] = tap.subarray(3 * i, 3 * i + 3)
      expect(a + b + c).toBeCloseTo(1, 12)
      expect(shift[i] + b + 2 * c).toBeCloseTo(mean[i] - mean[i - 1], 12)
      expect(Math.min(a, b, c)).toBeGreaterThanOrEqual(0)
    }
  })

  it('for an unreadable span keeps the two moments of renewal theory', () => {
    for (const [mean, variance] of [
      [30.120482, 39.409577],
      [16, 2.016],
      [2.3, 0.9],
      [0.4, 0.3],
    ] as const) {
      const years = gapYears({ kind: 'unreadable', mean, variance }, 1)
      const moments = momentsOf(years)
      expect(moments.mean).toBeCloseTo(mean, 6)
      expect(Math.abs(moments.variance - variance)).toBeLessThan(0.12)
      expect(years.first).toBeGreaterThanOrEqual(0)
    }
    expect(momentsOf(gapYears({ kind: 'unreadable', mean: 30.120482, variance: 39.409577 }, 1)).variance).toBeCloseTo(
      39.41,
      1,
    )
  })
})

describe('where a sample lies', () => {
  const layers = layersOf([...varves(3), ['event', 2, 1], ...varves(4)])
  const places = new SamplePlaces(layers, countChain(layers, chainDefaults))

  it('inside one layer it has that layer and no mean to take; a depth on a boundary belongs to the layer below', () => {
    expect(places.place(1.2, 1.8)).toMatchObject({ level: 1, older: Float64Array.of(0), share: Float64Array.of(1) })
    expect(places.place(2, 2).level).toBe(2)
    expect(places.place(0, 0).level).toBe(0)
  })

  it('over several layers it has them all by their share, event beds left out', () => {
    // Layers of 1 mm from 0 to 3, a bed from 3 to 5, layers from 5 on.
    const { level, older, share } = places.place(1.5, 6)
    expect(level).toBe(3)
    expect([...older]).toEqual([-1, 0, 1])
    expect([...share]).toEqual([0.2, 0.4, 0.4])
    expect(places.place(3.2, 4.8)).toMatchObject({ level: 3, share: Float64Array.of(1) })
  })

  it('outside the core it is refused in words', () => {
    expect(places.problem(8.5, 9.2)).toBe('9.2 mm lies below the last layer, which ends at 9 mm')
    expect(places.problem(-1, 2)).toBe('-1 mm lies above the first layer, which begins at 0 mm')
    expect(places.problem(3, 2)).toBe('top_mm 3 lies below base_mm 2; are they swapped?')
    expect(() => places.place(90, 91)).toThrow('the sample at 91 mm lies below the last layer')
  })
})
