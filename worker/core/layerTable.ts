import { describe } from '../check.ts'
import { layerRowKinds } from './countedLayers.ts'
import type { CountedLayers } from './countedLayers.ts'
import { readCsv } from './csv.ts'
import { columnOf, RowReader } from './rowProblems.ts'
import type { RowProblem } from './rowProblems.ts'

/** A table of layers, as far as it could be read. */
export interface LayerTable {
  layers: CountedLayers
  /** The numbers of the layers as the table gives them, [rows]. */
  names: string[]
  problems: RowProblem[]
}

/**
 * Reads a table of layers as the count writes it: layer,depth_mm,thickness_mm,probability,kind; further columns are let be.
 * Thickness may be empty where an edge was not seen; probability is not read for event beds and hiatuses.
 */
export function readLayerTable(text: string, name: string): LayerTable {
  const table = readCsv(text, name)
  const problems: RowProblem[] = []
  const [layer, depth, thickness, probability] = ['layer', 'depth_mm', 'thickness_mm', 'probability'].map((column) =>
    columnOf(table, column, name),
  )
  const kind = table.header.indexOf('kind')
  const rows = table.rows.length
  const layers: CountedLayers = {
    depth: new Float64Array(rows),
    thickness: new Float64Array(rows),
    probability: new Float64Array(rows),
    kind: new Uint8Array(rows),
  }
  for (let i = 0; i < rows; i++) {
    const row = new RowReader(table.rows[i], table.lines[i], problems)
    const word = row.text(kind) || 'varve'
    const which = layerRowKinds.indexOf(word as (typeof layerRowKinds)[number])
    if (which < 0) row.wrong('kind', `kind must be one of ${layerRowKinds.join(', ')}; it is ${describe(word)}`)
    layers.kind[i] = Math.max(0, which)
    layers.depth[i] = row.number(depth, 'depth_mm', null)
    if (i > 0 && layers.depth[i] < layers.depth[i - 1]) {
      row.wrong('depth_mm', `layers must be sorted downcore; ${layers.depth[i]} mm follows ${layers.depth[i - 1]} mm`)
    }
    layers.thickness[i] = row.number(thickness, 'thickness_mm', NaN)
    if (layers.thickness[i] < 0)
      row.wrong('thickness_mm', `thickness_mm must not be negative; it is ${layers.thickness[i]}`)
    if (word === 'event' || word === 'hiatus') continue
    layers.probability[i] = row.number(probability, 'probability', null)
    if (layers.probability[i] < 0 || layers.probability[i] > 1) {
      row.wrong('probability', `probability must lie between 0 and 1; it is ${layers.probability[i]}`)
    }
  }
  return { layers, names: table.rows.map((cells) => cells[layer].trim()), problems }
}
