import { checkAtLeast, checkFinite, checkSameLength, checkWithin, describe, Fault } from '../check.ts'

/** What a counted row stands for; see CountedLayers. */
export const layerRowKinds = ['varve', 'unreadable', 'event', 'hiatus'] as const
export type LayerRowKind = (typeof layerRowKinds)[number]

/** Counted layers from the top of the core downcore; columns [rows]. */
export interface CountedLayers {
  /** Young edge, mm. */
  depth: Float64Array
  /** mm, without event beds; NaN where an edge was not seen. */
  thickness: Float64Array
  /** Probability that the row's young edge is a boundary between two varve years. Not used for event beds and hiatuses. */
  probability: Float64Array
  /**
   * Index into layerRowKinds. `varve`: a year that is seen. `unreadable` without a thickness: one year placed in
   * unreadable ground by the count, with its probability; with a thickness: the whole span, whose years follow from the
   * thickness of the layers around it. `event`: a bed that took no time and has the year of the layer above it.
   * `hiatus`: a gap of unknown length under the row above.
   */
  kind: Uint8Array
}

/** Refuses columns that are no layers, naming the row (from 1). */
export function checkLayers({ depth, thickness, probability, kind }: CountedLayers): void {
  const rows = depth.length
  if (rows === 0) throw new Fault('argument', 'layers', 0, 'there are no layers; count the core first')
  checkSameLength('thickness', thickness, rows)
  checkSameLength('probability', probability, rows)
  checkSameLength('kind', kind, rows)
  for (let row = 0; row < rows; row++) {
    const at = `row ${row + 1}`
    checkFinite(`depth of ${at}`, depth[row])
    if (row > 0 && !(depth[row] >= depth[row - 1])) {
      const message = `layers must be sorted downcore; ${at} at ${depth[row]} mm follows ${depth[row - 1]} mm`
      throw new Fault('argument', 'layers', depth[row], message)
    }
    if (!Number.isNaN(thickness[row])) checkAtLeast(`thickness of ${at}`, thickness[row], 0)
    if (!(kind[row] < layerRowKinds.length)) {
      throw new Fault('argument', 'kind', kind[row], `kind of ${at} is not known: ${describe(kind[row])}`)
    }
    if (layerRowKinds[kind[row]] === 'varve' || layerRowKinds[kind[row]] === 'unreadable') {
      checkWithin(`probability of ${at}`, probability[row], 0, 1)
    }
  }
}
