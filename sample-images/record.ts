import { seededRandom, type Random } from '../worker/random.ts'
import { noise1 } from './noise.ts'

/**
 * What was laid down in the invented lake, year by year: the truth that the photograph and the radiograph are drawn from.
 * Depth is counted in photograph pixels (0.05 mm) below the sediment surface, before tilt and deformation.
 */

/** A thin dark or light lamina inside the summer layer; `at` and `width` in pixels below the couplet's top. */
export interface Lamina {
  at: number
  width: number
  /** Added darkness: positive dark (algae, clay pulse), negative light (a flood's silt). */
  darkness: number
  /** Rust (+) or olive (-) tint. */
  tint: number
  /** Not sharp above, as those of a single flood or bloom are. */
  blurred?: boolean
}

/** An event bed laid down within one summer: graded, light coarse base (down) to dark fine top (up). */
export interface EventBed {
  name: string
  kind: 'turbidite' | 'tephra'
  /** Pixels below the couplet's top at which the bed starts. */
  at: number
  thickness: number
}

/** One varve year: winter clay above, summer silt below. */
export interface Couplet {
  year: number
  /** Young edge: the sharp top of the winter clay. */
  top: number
  /** With the event bed, if it holds one. */
  thickness: number
  clay: number
  contrast: number
  tone: number
  faint: boolean
  doubled: boolean
  laminae: Lamina[]
  bed: EventBed | null
}

export interface Record {
  couplets: Couplet[]
  /** Depth of the last couplet's base. */
  length: number
}

/** The core was taken in summer: the youngest couplet is the open one of this year, without winter clay. */
export const coringYear = 2019
export const tephraYear = 1783
const openCouplet = 15
const yearCount = 440

/** The seed of the demo core. */
export const recordSeed = 20190714

/** Beds and the years they fell into. */
const beds = new Map<number, Omit<EventBed, 'at'>>([
  [1927, { name: 'flood turbidite', kind: 'turbidite', thickness: 104 }],
  [tephraYear, { name: 'grey tephra', kind: 'tephra', thickness: 7 }],
  [1689, { name: 'slope turbidite', kind: 'turbidite', thickness: 236 }],
])

/** Slowly drifting median thickness: compaction downcore, wetter and drier decades. */
function medianThickness(age: number): number {
  const drift = 0.34 * noise1(age / 75 + 3.3, 11) + 0.16 * noise1(age / 23, 12)
  return 24.5 * Math.exp(drift - 0.0002 * age)
}

/** How clear the couplets are: two stretches of weak seasons among clear ones. */
function clarity(age: number): number {
  const weak = Math.exp(-(((age - 148) / 13) ** 2)) + 0.8 * Math.exp(-(((age - 318) / 9) ** 2))
  return (0.92 + 0.13 * noise1(age / 17, 13)) * (1 - 0.42 * weak)
}

function summerLaminae(random: Random, clay: number, thickness: number, contrast: number, doubled: boolean): Lamina[] {
  const laminae: Lamina[] = []
  const room = thickness - clay
  const wanted = random.uniform() < 0.35 ? 0 : 1 + random.below(room > 20 ? 3 : 2)
  for (let i = 0; i < wanted; i++) {
    const at = clay + room * (0.22 + 0.62 * random.uniform())
    const dark = random.uniform() < 0.6
    const strength = contrast * (0.12 + 0.3 * random.uniform())
    laminae.push({
      at,
      width: 1 + 1.6 * random.uniform(),
      darkness: dark ? strength : -0.8 * strength,
      tint: random.uniform() < 0.2 ? 0.6 * random.uniform() : -0.5 * random.uniform(),
    })
  }
  if (doubled) {
    const at = clay + room * (0.42 + 0.16 * random.uniform())
    // Nearly a second winter, but it came in gradually: its top is not sharp.
    const darkness = contrast * (0.42 + 0.2 * random.uniform())
    laminae.push({ at, width: 0.4 * clay + 1, darkness, tint: -0.2, blurred: true })
  }
  return laminae
}

function drawCouplet(random: Random, year: number, top: number): Couplet {
  const age = coringYear - year
  const spread = Math.exp(0.24 * random.normal())
  const silt = Math.min(46, Math.max(11.5, medianThickness(age) * spread))
  const faint = random.uniform() < 0.05
  const doubled = !faint && silt > 19 && random.uniform() < 0.035
  const contrast = clarity(age) * Math.exp(0.16 * random.normal()) * (faint ? 0.34 : 1)
  const clay = silt * Math.min(0.42, Math.max(0.16, 0.27 + 0.06 * random.normal()))
  const laminae = summerLaminae(random, clay, silt, contrast, doubled)
  const tone = 0.09 * random.normal()
  const fallen = beds.get(year)
  const bed = fallen ? { ...fallen, at: clay + (silt - clay) * 0.4 } : null
  return { year, top, thickness: silt + (bed?.thickness ?? 0), clay, contrast, tone, faint, doubled, laminae, bed }
}

/** Draws the years from the youngest closed one downcore; the same seed draws the same lake. */
export function drawRecord(seed: number): Record {
  const random = seededRandom(seed)
  const couplets: Couplet[] = []
  let depth = openCouplet
  for (let k = 1; k <= yearCount; k++) {
    const couplet = drawCouplet(random, coringYear - k, depth)
    couplets.push(couplet)
    depth += couplet.thickness
  }
  return { couplets, length: depth }
}
