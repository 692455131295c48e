import { bench, describe } from 'vitest'
import { alignCounts } from '../../worker/core/alignment.ts'
import { coverageOver, type Coverage } from '../fixtures/countCoverage.ts'
import { simulateCore, usualCores, type SimulatedCores } from '../fixtures/simulatedCounts.ts'

/*
 * How often the 95 % interval of the total holds the true number of years, over simulated cores and counters; and what an
 * alignment costs. Run by hand, some twenty minutes:
 *   npx vitest bench --run test/bench/counts.bench.ts
 * WINTERCLAY_CORES and WINTERCLAY_SEED change number of cores a row and first seed; WINTERCLAY_ROWS picks rows by name.
 */

const cores = Number(process.env.WINTERCLAY_CORES ?? 500)
const first = Number(process.env.WINTERCLAY_SEED ?? 1)
const picked = process.env.WINTERCLAY_ROWS?.split(',') ?? null

const rows: Record<string, Partial<SimulatedCores>> = {
  'three counters': {},
  'three, shared bias 2 %': { sharedBias: 0.02 },
  'three, misses not by thickness': { thicknessSlope: [0, 0] },
  'three, misses by thickness squared and more': { thicknessSlope: [2, 3] },
  'three, other shared clarity': { thicknessSlope: [0, 1], clarity: 0.8 },
  'three, no doubtful marks': { doubtfulIfTrue: [0, 0], doubtfulIfFalse: [0, 0] },
  'three, doubt at random': { doubtfulIfTrue: [0.05, 0.05], doubtfulIfFalse: [0.05, 0.05] },
  'three, careful': { missed: [0.005, 0.015], false: [0.002, 0.01] },
  'three, careless': { missed: [0.04, 0.12], false: [0.02, 0.08] },
  'three, pointing 0.1 layers': { pointing: 0.1 },
  'three, thickness varies by 0.5': { thicknessSd: 0.5 },
  'three, 150 to 300 years': { years: [150, 300] },
  'five counters': { counters: 5 },
  'two counters': { counters: 2 },
  'two, shared bias 2 %': { counters: 2, sharedBias: 0.02 },
}

const percent = (share: number) => (100 * share).toFixed(1).padStart(6)
const line = (name: string, c: Coverage) =>
  `${name.padEnd(45)}${percent(c.counting)} ${percent(c.withSystematic)} ${c.width.toFixed(2).padStart(7)} ${c.bias.toFixed(2).padStart(6)}`

console.log(`${cores} cores a row from seed ${first}`)
console.log(`${''.padEnd(45)}  95 %  +bias   width   bias`)
for (const [name, options] of Object.entries(rows)) {
  if (picked && !picked.some((word) => name.includes(word))) continue
  console.log(line(name, coverageOver(cores, first, { ...usualCores, ...options })))
}

const five = simulateCore(1, { ...usualCores, counters: 5, years: [20_000, 20_000] }).counts
const consumed: number[] = []

describe('alignment', () => {
  bench('20,000 years by five counters', () => void consumed.push(alignCounts(five).position.length))
})
