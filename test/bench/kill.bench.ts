import { bench, describe } from 'vitest'
import { killAndReopen } from '../browser/killAndReopen.ts'
import { seededRandom } from '../../worker/random.ts'

/*
 * Kills a browser 200 times at random moments while its page edits and stores without end, and looks whether every edit that
 * was reported saved is there again. Run by hand, a few minutes:
 *   npx vitest bench --run test/bench/kill.bench.ts
 * WINTERCLAY_KILLS and WINTERCLAY_SEED change number and seed.
 */

const kills = Number(process.env.WINTERCLAY_KILLS ?? 200)
const seed = Number(process.env.WINTERCLAY_SEED ?? 2026)
const figures = await killAndReopen(kills, seededRandom(seed))
console.log(
  [
    `seed ${seed}: ${figures.kills} kills, ${figures.saved} edits reported saved, ${figures.losses.length} kills with a loss`,
    `after ${figures.ahead} kills edits were found that had not been reported yet`,
    ...figures.losses,
  ].join('\n'),
)

describe('saving', () => {
  // The figures above are the result. Vitest asks for at least one bench of its own.
  bench('an empty round of the clock, for comparison', () => void performance.now(), { time: 50 })
})
