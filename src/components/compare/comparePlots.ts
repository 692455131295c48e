import type { Agreement } from '../../../worker/core/counts.ts'
import { marks } from '../../document/layerSet.ts'
import type { NamedCount } from '../../session/comparison.svelte.ts'
import type { AgreementData, DifferencesData } from '../../view/plots/data.ts'

const rejected = marks.indexOf('rejected')
/** Stretch of marks shown side by side around the cursor, mm; more would run into each other. */
const stretch = 60

/** Each count's cumulative years minus the mean of all at the same depth: steps of one year become a picture of drift. */
export function differencesOf(counts: readonly NamedCount[], depthOf: (path: number) => number): DifferencesData {
  const places = [...new Set(counts.flatMap(({ count }) => [...count.layers.position]))].sort((a, b) => a - b)
  const years = counts.map(({ count: { layers } }) => {
    const column = new Float64Array(places.length)
    let sum = 0
    let next = 0
    places.forEach((place, i) => {
      for (; next < layers.position.length && layers.position[next] <= place; next++) {
        sum += layers.mark[next] === rejected ? 0 : layers.mark[next] === 0 ? 1 : 0.5
      }
      column[i] = sum
    })
    return column
  })
  const depth = Float64Array.from(places, depthOf)
  return {
    counters: counts.map(({ name }, k) => ({
      name,
      depth,
      difference: years[k].map(
        (year, i) => year - years.reduce((total, column) => total + column[i], 0) / years.length,
      ),
    })),
    band: null,
    horizons: [],
    depthUnit: (depth.at(-1) ?? 0) > 300 ? 'cm' : 'mm',
  }
}

/** The counters' marks in a stretch around a place, with the aligned sites. */
export function agreementOf(
  counts: readonly NamedCount[],
  agreement: Agreement,
  depthOf: (path: number) => number,
  around: number | null,
): AgreementData {
  const { position, label } = agreement.alignment
  const depth = position.map(depthOf)
  const centre = around === null ? depth[0] + stretch / 2 : depthOf(around)
  const from = Math.max(depth[0] - 1, centre - stretch / 2)
  return {
    counters: counts.map(({ name, count: { layers } }) => ({
      name,
      depth: layers.position.map(depthOf),
      mark: layers.mark,
    })),
    sites: { depth, own: agreement.own.map(depthOf), label },
    from,
    to: from + stretch,
    depthUnit: 'mm',
  }
}
