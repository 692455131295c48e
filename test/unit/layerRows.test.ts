import { describe, expect, it } from 'vitest'
import { layerRows, type YearBoundary } from '../../worker/core/layerRows.ts'

const seen = (position: number, probability = 0.9): YearBoundary => ({ position, probability, unseen: false })

describe('layers between boundaries', () => {
  it('are one a boundary: the couplet cut by the start is not listed, the one cut by the end has no thickness', () => {
    expect(layerRows([seen(10), seen(25), seen(45)], [])).toEqual([
      { from: 10, thickness: 15, probability: 0.9, kind: 'varve' },
      { from: 25, thickness: 20, probability: 0.9, kind: 'varve' },
      { from: 45, thickness: NaN, probability: 0.9, kind: 'varve' },
    ])
  })
  it('are none without boundaries', () => {
    expect(layerRows([], [])).toEqual([])
  })
  it('leave event beds out of the thickness and list them apart, in place', () => {
    const rows = layerRows([seen(10), seen(60), seen(80)], [{ from: 20, to: 45, kind: 'event' }])
    expect(rows.map(({ kind, from, thickness }) => [kind, from, thickness])).toEqual([
      ['varve', 10, 25],
      ['event', 20, 25],
      ['varve', 60, 20],
      ['varve', 80, NaN],
    ])
  })
  it('share a bed that a boundary lies in between the layers on both sides', () => {
    const rows = layerRows([seen(10), seen(30), seen(60)], [{ from: 25, to: 40, kind: 'event' }])
    expect(rows.filter(({ kind }) => kind === 'varve').map(({ thickness }) => thickness)).toEqual([15, 20, NaN])
  })
  it('have no thickness across a hiatus, nor where an edge was not seen', () => {
    const unseen: YearBoundary = { position: 50, probability: 1, unseen: true }
    const rows = layerRows([seen(10), seen(20), unseen, seen(60), seen(90)], [{ from: 70, to: 70, kind: 'hiatus' }])
    expect(rows.map(({ kind, thickness }) => [kind, thickness])).toEqual([
      ['varve', 10],
      ['varve', NaN],
      ['unreadable', NaN],
      ['varve', NaN],
      ['varve', NaN],
    ])
  })
})
