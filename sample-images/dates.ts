import type { DemoDate } from '../src/document/demoFacts.ts'
import { tephraYear } from './record.ts'
import type { Truth } from './truth.ts'

/**
 * Invented samples for radiocarbon: year of the varve they come from, the curve's age there (IntCal20, Reimer et al. 2020,
 * read at 1950 - year), the laboratory's error, and by how many of its own errors the measurement misses the curve.
 */
const samples = [
  { id: 'ASK-C1', year: 1700, curve: 110, sigma: 24, miss: 0.5, note: 'birch bark' },
  { id: 'ASK-C2', year: 1670, curve: 187, sigma: 23, miss: -0.7, note: 'leaf fragments' },
  { id: 'ASK-C3', year: 1645, curve: 267, sigma: 25, miss: 0.9, note: 'spruce needles' },
  { id: 'ASK-C4', year: 1608, curve: 362, sigma: 26, miss: -0.3, note: 'birch catkin scales' },
]

/** Wood that lay in the catchment for centuries before it reached the lake. */
const reworked = { id: 'ASK-C5', year: 1655, age: 745, sigma: 28, note: 'wood, worn; perhaps reworked' }

/** Depths between which the varves of the given years lie, mm, to 0.1. */
function depthsOf(truth: Truth, youngest: number, oldest: number): { topMm: number; baseMm: number } {
  const top = truth.boundaries[truth.years.indexOf(youngest)]
  const base = truth.boundaries[truth.years.indexOf(oldest) + 1]
  const mm = (px: number) => Math.round(px * truth.mmPerPx * 10) / 10
  return { topMm: mm(top), baseMm: mm(base) }
}

/** Dates that agree with the true years of the lake, but for one. */
export function inventedDates(truth: Truth): DemoDate[] {
  const tephra = truth.events.find((event) => event.kind === 'tephra')!
  const mm = (px: number) => Math.round(px * truth.mmPerPx * 100) / 100
  return [
    {
      id: 'ASK-Cs',
      kind: 'year',
      ...depthsOf(truth, 1964, 1962),
      value: 1963,
      sigma: 1,
      note: 'maximum of caesium-137, fallout of 1963',
    },
    {
      id: 'ASK-T1',
      kind: 'year',
      topMm: mm(tephra.from),
      baseMm: mm(tephra.to),
      value: tephraYear,
      sigma: 0.5,
      note: 'tephra of a dated eruption',
    },
    ...samples.map((sample): DemoDate => ({
      id: sample.id,
      kind: 'c14',
      ...depthsOf(truth, sample.year + 1, sample.year - 1),
      value: Math.round(sample.curve + sample.miss * sample.sigma),
      sigma: sample.sigma,
      note: sample.note,
    })),
    {
      id: reworked.id,
      kind: 'c14',
      ...depthsOf(truth, reworked.year + 1, reworked.year - 1),
      value: reworked.age,
      sigma: reworked.sigma,
      note: reworked.note,
    },
  ]
}
