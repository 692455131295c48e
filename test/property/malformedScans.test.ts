import { describe, expect, test } from 'vitest'
import { sharpDecoders } from '../../src/headless/sharpDecoders.ts'
import { seededRandom } from '../../worker/random.ts'
import { openScanWith } from '../../worker/reading/openScan.ts'
import { seedScans } from '../fixtures/seedScans.ts'
import { mutate } from '../fixtures/mutate.ts'
import { readMutant } from '../fixtures/readMutant.ts'

/** Damaged files of each kind here; ten thousand of each are read in test/bench/malformedScans.bench.ts. */
const count = 200
const seeds = await seedScans()

describe('a damaged scan is refused in words or read, never worse', () => {
  test.each(seeds)('$name', async ({ name, bytes }) => {
    const outcomes = new Map<string, number>()
    for (let seed = 0; seed < count; seed++) {
      const mutant = mutate(bytes, seed)
      const open = () => openScanWith(sharpDecoders, new Blob([new Uint8Array(mutant)]), name)
      const outcome = await readMutant(open, seededRandom(seed)).catch((error: unknown) => {
        throw new Error(`mutant ${seed} of ${name} was neither refused nor read`, { cause: error })
      })
      outcomes.set(outcome, (outcomes.get(outcome) ?? 0) + 1)
    }
    // Most damage is noticed, and some is harmless: both must occur, or the mutator does not do its work. PNG has checksums.
    expect(outcomes.get('refused on opening') ?? 0).toBeGreaterThan(count / 10)
    if (!name.endsWith('.png')) expect(outcomes.get('read') ?? 0).toBeGreaterThan(count / 100)
    expect(process.memoryUsage().rss).toBeLessThan(1e9)
  })
})
