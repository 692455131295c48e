import { expect, test } from 'vitest'
import { seededRandom } from '../../worker/random.ts'
import { killAndReopen } from './killAndReopen.ts'

test('no edit reported saved is lost when the browser is killed at any moment', async () => {
  const { kills, saved, losses } = await killAndReopen(12, seededRandom(Number(process.env.WINTERCLAY_SEED ?? 1)))
  expect(losses).toEqual([])
  expect(kills).toBe(12)
  expect(saved).toBeGreaterThan(12)
}, 180_000)
