import { noise1 } from './noise.ts'
import type { Couplet, EventBed, Record } from './record.ts'

/** Samples a pixel in the columns below. */
export const fineness = 4

/** The record as continuous columns [depth x fineness], before any deformation. */
export interface Columns {
  /** 0 light summer silt, 1 dark winter clay; a little beyond either is possible. */
  darkness: Float32Array
  /** Rust (+) or olive (-). */
  tint: Float32Array
  /** 0 clay, 1 coarse silt and sand: drives grain and radiographic density. */
  coarseness: Float32Array
  /** 0 sediment of the lake, 1 tephra: drives colour. */
  ash: Float32Array
}

/** Darkness and coarseness of a varve at `z` pixels below its top; `silt` is its thickness without event bed. */
function varveAt(couplet: Couplet, silt: number, z: number): { dark: number; coarse: number; tint: number } {
  const { clay, contrast, tone } = couplet
  let dark: number
  let coarse: number
  if (z < clay) {
    // Clay settles out of still water all winter: it fines, and darkens, up to its sharp top.
    dark = contrast * (0.98 - 0.16 * (z / clay)) + 0.3 * (1 - contrast) + 0.05 * noise1((couplet.top + z) / 2.6, 14)
    coarse = 0.05
  } else {
    const q = (z - clay) / (silt - clay)
    const fall = 0.42 * contrast * Math.exp(-q / 0.1)
    const graded = 0.31 - 0.25 * q
    // Floods, plankton blooms and wind leave laminae too fine to count in every summer.
    const fine = 0.1 * noise1((couplet.top + z) / 1.9, 15) + 0.08 * noise1((couplet.top + z) / 4.6, 16)
    dark = fall + contrast * graded + 0.3 * (1 - contrast) + fine
    coarse = 0.2 + 0.6 * q
  }
  // Snow melt leaves the lightest, coarsest lamina at the very base.
  dark -= 0.2 * contrast * Math.exp(-(((silt - z) / 1.8) ** 2))
  let tint = 0
  for (const lamina of couplet.laminae) {
    const d = z - lamina.at
    // Sharp above, fading below, like every pulse that settles.
    const shape =
      d < 0
        ? Math.exp(-((d / ((lamina.blurred ? 1 : 0.35) * lamina.width)) ** 2))
        : Math.exp(-((d / lamina.width) ** 2))
    dark += lamina.darkness * shape
    tint += lamina.tint * shape
  }
  return { dark: dark + tone, coarse, tint }
}

/** Darkness and coarseness of an event bed at `z` pixels below its top. */
function bedAt(bed: EventBed, z: number): { dark: number; coarse: number } {
  const q = z / bed.thickness
  if (bed.kind === 'tephra') return { dark: 0.08 + 0.25 * Math.exp(-q / 0.25), coarse: 0.5 }
  const cap = z < 0.11 * bed.thickness ? 0.42 : 0
  const pulses = 0.05 * Math.sin(23 * q ** 1.7) * q
  return { dark: 0.8 - 0.92 * q ** 0.7 + cap + pulses, coarse: 0.1 + 1.3 * q * q }
}

/** Blurs a column in place by three passes of a box: the width of the lens's spot, about 0.75 px. */
function softened(column: Float32Array): Float32Array {
  let from = column
  for (let pass = 0; pass < 3; pass++) {
    const to = new Float32Array(from.length)
    for (let i = 0; i < from.length; i++) {
      const a = from[Math.max(0, i - 2)] + from[Math.max(0, i - 1)] + from[i]
      to[i] = (a + from[Math.min(from.length - 1, i + 1)] + from[Math.min(from.length - 1, i + 2)]) / 5
    }
    from = to
  }
  return from
}

/** Lays the record out in depth. */
export function columnsOf(record: Record): Columns {
  const n = Math.ceil(record.length * fineness)
  const darkness = new Float32Array(n).fill(0.22)
  const tint = new Float32Array(n)
  const coarseness = new Float32Array(n).fill(0.3)
  const ash = new Float32Array(n)
  for (const couplet of record.couplets) {
    const from = Math.ceil(couplet.top * fineness)
    const to = Math.min(n, Math.ceil((couplet.top + couplet.thickness) * fineness))
    const { bed } = couplet
    const silt = couplet.thickness - (bed?.thickness ?? 0)
    for (let i = from; i < to; i++) {
      const z = i / fineness - couplet.top
      if (bed && z >= bed.at && z < bed.at + bed.thickness) {
        const inBed = bedAt(bed, z - bed.at)
        darkness[i] = inBed.dark
        coarseness[i] = inBed.coarse
        ash[i] = bed.kind === 'tephra' ? 1 : 0
      } else {
        const here = varveAt(couplet, silt, bed && z >= bed.at ? z - bed.thickness : z)
        darkness[i] = here.dark
        coarseness[i] = here.coarse
        tint[i] = here.tint
      }
    }
  }
  return { darkness: softened(darkness), tint: softened(tint), coarseness: softened(coarseness), ash: softened(ash) }
}

/** A column's value at a depth in pixels, between samples. */
export function valueAt(column: Float32Array, depth: number): number {
  const at = Math.min(column.length - 1.001, Math.max(0, depth * fineness - 0.5))
  const i = Math.floor(at)
  return column[i] + (column[i + 1] - column[i]) * (at - i)
}
