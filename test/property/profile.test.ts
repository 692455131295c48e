import { describe, expect, it } from 'vitest'
import { extractProfile } from '../../worker/core/profile.ts'
import { movingMean, movingMedian } from '../../worker/core/movingWindow.ts'
import { findPeaks } from '../../worker/core/peaks.ts'
import { bucketMedian, medianOf, trimmedMeanOf } from '../../worker/core/quickselect.ts'
import { defaultRecipe } from '../../worker/core/recipe.ts'
import type { ScanShape } from '../../worker/core/scan.ts'
import { axisPosition, distanceAtAxis, pathLength, type Transect } from '../../worker/core/transect.ts'
import { seededRandom, type Random } from '../../worker/random.ts'
import { scanPixels, type Point } from '../../worker/units.ts'
import { runOnSamples } from '../fixtures/runOnSamples.ts'

const seeds = Array.from({ length: 25 }, (_, i) => 1000 + i)
const point = (x: number, y: number): Point => ({ x: scanPixels(x), y: scanPixels(y) })

/** Numbers of many kinds: fine, coarse with ties, constant; with gaps on request. */
function columnOf(random: Random, length: number, gaps: boolean): Float64Array {
  const kind = random.below(3)
  return Float64Array.from({ length }, () => {
    if (gaps && random.uniform() < 0.1) return NaN
    return kind === 0 ? 100 * random.uniform() : kind === 1 ? random.below(6) : 42
  })
}

const middle = (values: number[]): number => {
  const sorted = values.filter((value) => !Number.isNaN(value)).sort((a, b) => a - b)
  const half = sorted.length >> 1
  return sorted.length === 0 ? NaN : sorted.length % 2 === 1 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2
}

describe('a reversed transect', () => {
  it('reverses the profile exactly: straight, along the scan’s rows or columns, level', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      const shape: ScanShape = { width: 40 + random.below(60), height: 40 + random.below(60), channels: 3, bits: 8 }
      const data = Uint8Array.from({ length: shape.width * shape.height * 3 }, () => random.below(256))
      const alongX = random.uniform() < 0.5
      const place = 10 + 20 * random.uniform()
      const points = alongX ? [point(3, place), point(37, place)] : [point(place, 2), point(place, 39)]
      const masks = random.uniform() < 0.5 ? [] : [[point(5, 5), point(30, 12), point(18, 33)]]
      const transect: Transect = { points, width: scanPixels(1 + random.below(18)), tilt: 0, masks }
      const read = (path: Transect) =>
        runOnSamples(extractProfile(shape, path, defaultRecipe.profile), data, shape.width, 3).result
      const there = read(transect)
      const back = read({ ...transect, points: points.toReversed() })
      expect(back.intensity.toReversed(), `seed ${seed}`).toEqual(there.intensity)
      expect(back.usable.toReversed(), `seed ${seed}`).toEqual(there.usable)
      // Left becomes right as well. Lanes are sums taken in the other order.
      back.lanes
        .toReversed()
        .forEach((value, i) =>
          Number.isNaN(value)
            ? expect(there.lanes[i], `seed ${seed}`).toBeNaN()
            : expect(Math.abs(value - there.lanes[i]), `seed ${seed}`).toBeLessThan(1e-4),
        )
    }
  })

  it('reverses the profile to rounding: oblique, bent, tilted', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      const shape: ScanShape = { width: 90, height: 120, channels: 1, bits: 16 }
      const data = Uint16Array.from({ length: 90 * 120 }, () => random.below(65_536))
      // Whole lengths, so that rows fall on the same places from either end.
      const points =
        random.uniform() < 0.5 ? [point(30, 20), point(60, 60)] : [point(40, 15), point(40, 45), point(70, 85)]
      const tilt = 0.2 * (random.uniform() - 0.5)
      const transect: Transect = { points, width: scanPixels(9 + random.below(9)), tilt, masks: [] }
      const read = (path: Transect) =>
        runOnSamples(extractProfile(shape, path, defaultRecipe.profile), data, shape.width, 1).result
      const there = read(transect)
      const back = read({ ...transect, points: points.toReversed() })
      expect(back.intensity.length).toBe(there.intensity.length)
      back.intensity
        .toReversed()
        .forEach((value, i) =>
          expect(Math.abs(value - there.intensity[i]), `seed ${seed}, row ${i}`).toBeLessThan(0.05),
        )
    }
  })
})

describe('medians', () => {
  it('of rows are those of a full sort, by selection and by buckets', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      for (const count of [1, 2, 3, 47, 48, 49, 200, 333]) {
        const values = Float32Array.from(columnOf(random, count, false))
        const expected = middle([...values])
        expect(medianOf(values.slice(), count), `seed ${seed}, ${count} values`).toBe(expected)
        expect(bucketMedian(100)(values.slice(), count), `seed ${seed}, ${count} values`).toBe(expected)
        const kept = [...values].sort((a, b) => a - b).slice(Math.floor(0.2 * count), count - Math.floor(0.2 * count))
        const mean = kept.reduce((sum, value) => sum + value, 0) / kept.length
        expect(trimmedMeanOf(values.slice(), count, 0.2)).toBeCloseTo(mean, 9)
      }
    }
  })

  it('and means of moving windows are those of each window alone, whatever its width and gaps', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      const column = columnOf(random, 1 + random.below(150), true)
      const fixed = random.below(20)
      const half = random.uniform() < 0.5 ? fixed : Int32Array.from(column, () => random.below(20))
      const windowOf = (row: number) => {
        const reach = typeof half === 'number' ? half : half[row]
        return [...column.subarray(Math.max(0, row - reach), row + reach + 1)].filter((value) => !Number.isNaN(value))
      }
      const medians = movingMedian(column, half)
      const means = movingMean(column, half)
      for (const [row, value] of column.entries()) {
        const window = windowOf(row)
        expect(medians[row], `seed ${seed}, row ${row}`).toBe(Number.isNaN(value) ? NaN : middle(window))
        const mean = window.reduce((sum, one) => sum + one, 0) / window.length
        if (Number.isNaN(value)) expect(means[row]).toBeNaN()
        else expect(means[row], `seed ${seed}, row ${row}`).toBeCloseTo(mean, 8)
      }
    }
  })
})

describe('prominence', () => {
  it('is that of walking out from each peak, gaps and plateaus included', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      const column = columnOf(random, 200, seed % 2 === 0)
      const { index, prominence } = findPeaks(column)
      for (const [p, peak] of index.entries()) {
        const lowest = (step: -1 | 1) => {
          let low = column[peak]
          for (let i = peak; i >= 0 && i < column.length && column[i] <= column[peak]; i += step)
            low = Math.min(low, column[i])
          return low
        }
        expect(prominence[p], `seed ${seed}`).toBe(column[peak] - Math.max(lowest(-1), lowest(1)))
      }
    }
  })
})

describe('distance along a path', () => {
  it('and downcore coordinate lead back to each other', () => {
    for (const seed of seeds) {
      const random = seededRandom(seed)
      const shape: ScanShape = { width: 500, height: 500, channels: 1, bits: 8 }
      const young = random.uniform() < 0.5 ? 'low' : 'high'
      const axis = random.uniform() < 0.5 ? 'x' : 'y'
      let along = 10
      const points = Array.from({ length: 2 + random.below(5) }, () => {
        along += 5 + 80 * random.uniform()
        const downcore = young === 'low' ? along : 500 - along
        const across = 500 * random.uniform()
        return axis === 'x' ? point(downcore, across) : point(across, downcore)
      })
      const transect: Transect = { points, width: scanPixels(5), tilt: null, masks: [] }
      const distance = pathLength(points) * random.uniform()
      const coordinate = axisPosition(transect, { axis, young }, shape, distance)
      expect(distanceAtAxis(transect, { axis, young }, shape, coordinate), `seed ${seed}`).toBeCloseTo(distance, 7)
    }
  })
})
