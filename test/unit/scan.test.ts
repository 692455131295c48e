import { describe, expect, it } from 'vitest'
import { paintSamples, stretchedDisplay } from '../../worker/core/display.ts'
import { coreLength, samplesOf, uprightView } from '../../worker/core/scan.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import type { Samples } from '../../worker/work.ts'

/**
 * A scan of 3 x 2 pixels:
 *   1 2 3
 *   4 5 6
 */
const scan = () => samplesOf(Uint8Array.from([1, 2, 3, 4, 5, 6]), 3, 2, 1)
const rowsOf = (view: Samples) =>
  Array.from({ length: view.shape[0] }, (_, i) => Array.from({ length: view.shape[1] }, (__, j) => view.get(i, j, 0)))
const upright = (axis: Orientation['axis'], young: Orientation['young']) => rowsOf(uprightView(scan(), { axis, young }))

describe('a core stands upright, young end up', () => {
  it('as it is when its axis runs down the picture', () => {
    expect(upright('y', 'low')).toEqual([
      [1, 2, 3],
      [4, 5, 6],
    ])
  })
  it('by half a turn when its young end is at the bottom', () => {
    expect(upright('y', 'high')).toEqual([
      [6, 5, 4],
      [3, 2, 1],
    ])
  })
  it('by a quarter turn to the right when its young end is at the left', () => {
    expect(upright('x', 'low')).toEqual([
      [4, 1],
      [5, 2],
      [6, 3],
    ])
  })
  it('by a quarter turn to the left when its young end is at the right', () => {
    expect(upright('x', 'high')).toEqual([
      [3, 6],
      [2, 5],
      [1, 4],
    ])
  })
  it('without a copy: the view shares the samples', () => {
    const samples = scan()
    expect(uprightView(samples, { axis: 'x', young: 'high' }).data).toBe(samples.data)
  })
  it('and is as long as the scan along its axis', () => {
    const shape = { width: 3, height: 2, channels: 1 as const, bits: 8 as const }
    expect(coreLength(shape, { axis: 'x', young: 'low' })).toBe(3)
    expect(coreLength(shape, { axis: 'y', young: 'low' })).toBe(2)
  })
})

describe('how a scan is shown', () => {
  const plain = { black: 0, white: 255, gamma: 1, channel: 'colour' as const }

  it('is its own values when nothing is asked for', () => {
    const rgba = paintSamples(samplesOf(Uint8Array.from([10, 20, 30]), 1, 1, 3), plain, 8)
    expect([...rgba]).toEqual([10, 20, 30, 255])
  })
  it('spreads the stretch between black and white over the screen, and cuts off beyond', () => {
    const rgba = paintSamples(
      samplesOf(Uint16Array.from([33000, 35000, 37000, 60000]), 4, 1, 1),
      { ...plain, black: 33000, white: 37000 },
      16,
    )
    expect([rgba[0], rgba[4], rgba[8], rgba[12]]).toEqual([0, 128, 255, 255])
  })
  it('shows one channel as grey, and grey by BT.709 luminance: 200, 100, 50 is 117.65 (ITU-R BT.709-6)', () => {
    const pixel = () => samplesOf(Uint8Array.from([200, 100, 50]), 1, 1, 3)
    expect([...paintSamples(pixel(), { ...plain, channel: 'green' }, 8)]).toEqual([100, 100, 100, 255])
    expect([...paintSamples(pixel(), { ...plain, channel: 'grey' }, 8)]).toEqual([118, 118, 118, 255])
  })
  it('opens dark tones with a gamma above 1', () => {
    const rgba = paintSamples(samplesOf(Uint8Array.from([64]), 1, 1, 1), { ...plain, gamma: 2 }, 8)
    expect(rgba[0]).toBe(Math.round(255 * Math.sqrt(64 / 255)))
  })
  it('can be stretched to the middle 99 % of the samples', () => {
    const grey = Uint16Array.from({ length: 1000 }, (_, i) => 33000 + i)
    expect(stretchedDisplay(samplesOf(grey, 1000, 1, 1), 16)).toMatchObject({ black: 33005, white: 33995 })
    expect(stretchedDisplay(samplesOf(new Uint8Array(10).fill(7), 10, 1, 1), 8)).toMatchObject({ black: 7, white: 8 })
  })
})
