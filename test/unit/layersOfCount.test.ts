import { describe, expect, it } from 'vitest'
import { countChain, chainDefaults } from '../../worker/core/countChain.ts'
import { checkLayers, layerRowKinds } from '../../worker/core/countedLayers.ts'
import { layersOfCount } from '../../worker/core/layersOfCount.ts'

const positions = Float64Array.from({ length: 30 }, (_, i) => 10 * (i + 1))
const count = (spans: Parameters<typeof layersOfCount>[0]['spans'] = []) =>
  layersOfCount({ position: positions, probability: new Float64Array(30).fill(1), spans, mmPerPx: 0.1, depthTop: 100 })

describe('the layers of a count', () => {
  it('are one row a boundary, in mm below the surface', () => {
    const layers = count()
    expect(layers.depth[0]).toBeCloseTo(101, 12)
    expect(layers.thickness[0]).toBeCloseTo(1, 12)
    expect(layers.thickness[29]).toBeNaN()
    expect(() => checkLayers(layers)).not.toThrow()
  })

  it('hold event beds, unreadable stretches and hiatuses as rows of their own, sorted downcore', () => {
    const layers = count([
      { from: 52, to: 57, kind: 'event' },
      { from: 121, to: 159, kind: 'unreadable' },
      { from: 205, to: 205, kind: 'hiatus' },
    ])
    const kinds = [...layers.kind].map((kind) => layerRowKinds[kind])
    expect(kinds.filter((kind) => kind !== 'varve')).toEqual(['event', 'unreadable', 'hiatus'])
    expect(layers.thickness[4]).toBeCloseTo(0.5, 12)
    expect(layers.thickness[kinds.indexOf('unreadable')]).toBeCloseTo(3.8, 12)
    expect(layers.thickness[kinds.indexOf('unreadable') - 1]).toBeNaN()
    expect(() => checkLayers(layers)).not.toThrow()
    expect(() => countChain(layers, chainDefaults)).not.toThrow()
  })

  it('need a scale', () => {
    expect(() =>
      layersOfCount({ position: positions, probability: positions, spans: [], mmPerPx: NaN, depthTop: 0 }),
    ).toThrow('mm per pixel must be a number greater than 0; it is NaN')
  })
})
