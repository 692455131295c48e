import { describe, expect, it } from 'vitest'
import type { CountedLayers } from '../../worker/core/countedLayers.ts'
import { builtInCurve, yearlyCurve } from '../../worker/core/curve.ts'
import { coreWiggle } from '../../worker/core/coreWiggle.ts'
import type { CoreDate } from '../../worker/core/dates.ts'
import { dateCore } from '../../worker/core/dating.ts'
import { seededRandom } from '../../worker/random.ts'
import { finish } from '../../worker/work.ts'

const curve = yearlyCurve(builtInCurve())
const n = 1001
const topYear = -500

const layers: CountedLayers = {
  depth: Float64Array.from({ length: n }, (_, i) => i),
  thickness: new Float64Array(n).fill(1),
  probability: new Float64Array(n).fill(0.98),
  kind: new Uint8Array(n),
}

/** Radiocarbon dates of the true years of some layers, with noise, and with an offset to all. */
function datesOf(yearOf: (layer: number) => number, offset: number, seed: number): CoreDate[] {
  const random = seededRandom(seed)
  return [50, 160, 270, 380, 490, 600, 710, 820, 930, 990].map((layer) => {
    const value = curve.age[1950 - Math.round(yearOf(layer))] + 20 * random.normal() + offset
    return {
      id: `c${layer}`,
      kind: 'c14',
      top: layer + 0.5,
      base: layer + 0.5,
      value,
      sigma: 20,
      offset: 0,
      offsetSigma: 0,
    }
  })
}

const run = (dates: CoreDate[], top: number | null = topYear) =>
  finish(dateCore({ layers, dates, topYear: top, curves: [] })).crossCheck

describe('the cross-check of count and dates', () => {
  const plain = (layer: number) => topYear - 0.98 * layer

  it('of a sound core finds nothing: the fit is fair, no stretch is named, no hard water', () => {
    const { fit, outliers, stretches, hardWater, bias } = run(datesOf(plain, 0, 4))
    expect(fit?.degrees).toBe(10)
    expect(fit?.probability).toBeGreaterThan(0.01)
    expect(outliers).toEqual([])
    expect(stretches.filter(({ named }) => named)).toEqual([])
    expect(hardWater?.signature).toBe(false)
    expect(Math.abs(bias.percent)).toBeLessThan(3 * bias.percentSd)
  })

  it('names the stretch in which 150 years were missed, and how many', () => {
    const missed = (layer: number) => plain(layer) - (layer > 540 ? 150 : 0)
    const { stretches } = run(datesOf(missed, 0, 5))
    const [first, second] = stretches
    // The date just below the step may pass for an outlier; the next one then ends the stretch.
    expect(first).toMatchObject({ above: 'c490', named: true })
    expect(['c600', 'c710']).toContain(first.below)
    expect(Math.abs(first.missedYears - 150)).toBeLessThan(3 * first.missedSd)
    expect(first.probability).toBeLessThan(0.01)
    expect(second.probability).toBeGreaterThan(first.probability)
  })

  it('warns of hard water by its signature: 14C ages 350 a too old while their wiggles match, anchored or floating', () => {
    const dates = datesOf(plain, 350, 6)
    const { hardWater } = run(dates)
    expect(hardWater?.signature).toBe(true)
    expect(Math.abs((hardWater?.offset ?? 0) - 350)).toBeLessThan(60)
    expect(run(dates, null).hardWater?.offset).toBeGreaterThan(0)
    expect(run(dates.slice(0, 2)).hardWater).toBeNull()
  })
})

describe('the wiggle match of a core', () => {
  it('puts the series where it belongs and brings the curve to draw it on', () => {
    const dates = datesOf((layer) => topYear - 0.98 * layer, 0, 4)
    const { match, series, curve: shown } = coreWiggle({ layers, dates, topYear: null, curves: [] })
    expect(Math.abs(1950 - match.mode - topYear)).toBeLessThan(25)
    expect(series.map(({ id }) => id)).toEqual(dates.map(({ id }) => id))
    expect(series[0].older).toBeCloseTo(49, 9)
    expect(shown.from).toBeLessThan(match.mode)
    expect(shown.from + shown.age.length).toBeGreaterThan(match.mode + 970)
    expect(() => coreWiggle({ layers, dates: [], topYear: 3, curves: [] })).toThrow(
      'there is no radiocarbon date among the dates',
    )
  })
})
