import { cpus } from 'node:os'
import { performance } from 'node:perf_hooks'
import { bench, describe } from 'vitest'
import { builtInCurve, yearlyCurve } from '../../worker/core/curve.ts'
import { dateCore } from '../../worker/core/dating.ts'
import { seededRandom } from '../../worker/random.ts'
import { finish } from '../../worker/work.ts'
import { coverage, drawCore } from '../fixtures/datedCore.ts'

/*
 * What exact ages cost against the length of the core, and whether their 95.4 % ranges hold the truth. Run by hand:
 *   npx vitest bench --run test/bench/lattice.bench.ts
 * Prints a table and a drawing of processor time against length, then the coverage of 400 + 400 + 400 simulated cores.
 */

const curve = yearlyCurve(builtInCurve())
let consumed = 0

function drawn(layers: number) {
  const kind = { layers, leastProbability: 0.88, biasSd: 0.02, topYear: 1000, dates: 10, outliers: 0.05 }
  return drawCore(seededRandom(layers), kind, curve)
}

/** Processor milliseconds and wall milliseconds of one run, and what the heap and the buffers hold at its end. */
function measured(layers: number, biasNodes: number | null) {
  const core = drawn(layers)
  const request = { layers: core.layers, dates: core.dates, topYear: 1000, curves: [], lattice: { biasNodes } }
  finish(dateCore({ ...request, lattice: { biasNodes: 3 } }))
  const before = process.cpuUsage()
  const start = performance.now()
  const { bias, ages } = finish(dateCore(request))
  const wall = performance.now() - start
  const used = process.cpuUsage(before)
  consumed += ages.mean[layers - 1]
  const { heapUsed, arrayBuffers } = process.memoryUsage()
  const memory = (heapUsed + arrayBuffers) / 1e6
  return {
    cpu: (used.user + used.system) / 1000,
    wall,
    nodes: bias.factor.length,
    memory,
    cells: ages.density.probability.length,
  }
}

function cost(): void {
  const lines = ['', `exact ages, 10 dates (${cpus()[0].model}, node ${process.version})`]
  lines.push('layers   nodes   cpu ms   wall ms   memory MB   years stored')
  for (const biasNodes of [15, null]) {
    const rows = [500, 1000, 2000, 4000, 8000, 12_000].map((layers) => ({ layers, ...measured(layers, biasNodes) }))
    lines.push(biasNodes === null ? 'nodes found by halving' : `${biasNodes} nodes given`)
    for (const { layers, nodes, cpu, wall, memory, cells } of rows) {
      const figures = [layers, nodes, cpu.toFixed(0), wall.toFixed(0), memory.toFixed(0), cells]
      lines.push(figures.map((one) => String(one).padStart(9)).join(' '))
    }
    const most = Math.max(...rows.map(({ cpu }) => cpu))
    for (const { layers, cpu } of rows) {
      lines.push(`${String(layers).padStart(7)} ${'#'.repeat(Math.max(1, Math.round((60 * cpu) / most)))}`)
    }
  }
  process.stdout.write(`${lines.join('\n')}\n`)
}

function truth(): void {
  const trial = { cores: 400, layers: 800, dates: 6, outliers: 0.05, seed: 7 }
  const kinds = [
    ['random counts, no bias assumed', 0, 0],
    ['biased counts (SD 2 %), bias of 2 % assumed', 0.02, 0.02],
    ['random counts, bias of 2 % assumed all the same', 0, 0.02],
  ] as const
  for (const [name, biasSd, assumedSd] of kinds) {
    const shares = coverage({ ...trial, biasSd, assumedSd }, curve)
    const percent = shares.map((share) => `${(100 * share).toFixed(1)} %`).join('  ')
    process.stdout.write(`coverage of 95.4 % ranges by quarter of depth, ${name}: ${percent}\n`)
  }
}

describe('exact ages', () => {
  bench('cost against length', cost, { iterations: 1, warmupIterations: 0, time: 0, warmupTime: 0 })
  bench('coverage of 1,200 cores', truth, { iterations: 1, warmupIterations: 0, time: 0, warmupTime: 0 })
})

process.on('exit', () => {
  if (Number.isNaN(consumed)) throw new Error('the ages were not computed')
})
