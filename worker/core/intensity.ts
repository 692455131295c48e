import { Fault } from '../check.ts'
import type { Samples } from '../work.ts'
import { lightnessOf, linearFromCoded, luminanceWeights, tristimulusWeights } from './colour.ts'
import type { ScanShape } from './scan.ts'

/** Which value of a pixel is read: BT.709 luminance, CIE L*, one channel, or the grey value itself for grey scans. */
export type Channel = 'luminance' | 'lightness' | 'red' | 'green' | 'blue'

/** Where an intensity goes: element `offset + row * rowStride + column * columnStride` of `data`, for the rows and columns of the samples. */
export interface Plane {
  data: Float32Array
  offset: number
  rowStride: number
  columnStride: number
}

/** Reads the intensity of every pixel of samples [rows, columns, channels] into a plane, in the file's units (L*: 0 to 100). */
export type IntensityReader = (samples: Samples, plane: Plane) => void

/** Columns read together, so that a plane that turns rows into columns is written near where it was written last. */
const columnsAtOnce = 32

/**
 * How the intensity of a pixel is made from its channels. Sums of one looked-up value per channel, so that undoing the sRGB
 * transfer curve costs no more than leaving it. Alpha is not looked at: what is to be left out is masked by hand.
 */
export function intensityReader(shape: ScanShape, channel: Channel, linear: boolean): IntensityReader {
  const full = shape.bits === 8 ? 255 : 65535
  const colour = shape.channels >= 3
  const light = channel === 'lightness'
  const valueOf = (code: number) => (linear || light ? linearFromCoded(code / full) : code)
  const scale = light || !linear ? 1 : full
  const tableOf = (weight: number) =>
    Float64Array.from({ length: full + 1 }, (_, code) => weight * scale * valueOf(code))
  const finish = light ? lightnessOf : null
  const parts = partsOf(channel, colour)
  if (parts.length === 1) return oneChannel(parts[0].at, tableOf(1), finish)
  const [red, green, blue] = parts.map(({ weight }) => tableOf(weight))
  return threeChannels(red, green, blue, finish)
}

/** The channels that make up an intensity, and their weights. */
function partsOf(channel: Channel, colour: boolean): { at: number; weight: number }[] {
  if (!colour) return [{ at: 0, weight: 1 }]
  switch (channel) {
    case 'red':
      return [{ at: 0, weight: 1 }]
    case 'green':
      return [{ at: 1, weight: 1 }]
    case 'blue':
      return [{ at: 2, weight: 1 }]
    case 'luminance':
      return luminanceWeights.map((weight, at) => ({ at, weight }))
    case 'lightness':
      return tristimulusWeights.map((weight, at) => ({ at, weight }))
    default:
      throw new Fault(
        'argument',
        'recipe.profile.channel',
        channel,
        `recipe.profile.channel must be one of luminance, lightness, red, green, blue; it is ${JSON.stringify(channel)}`,
      )
  }
}

type Finish = ((value: number) => number) | null

function oneChannel(at: number, table: Float64Array, finish: Finish): IntensityReader {
  const lookedUp = finish ? table.map(finish) : table
  return ({ data, offset, stride, shape }, plane) => {
    const [rows, columns] = shape
    for (let first = 0; first < columns; first += columnsAtOnce) {
      const end = Math.min(columns, first + columnsAtOnce)
      for (let row = 0; row < rows; row++) {
        let from = offset + at * stride[2] + row * stride[0] + first * stride[1]
        let to = plane.offset + row * plane.rowStride + first * plane.columnStride
        for (let column = first; column < end; column++) {
          plane.data[to] = lookedUp[data[from]]
          from += stride[1]
          to += plane.columnStride
        }
      }
    }
  }
}

function threeChannels(red: Float64Array, green: Float64Array, blue: Float64Array, finish: Finish): IntensityReader {
  return ({ data, offset, stride, shape }, plane) => {
    const [rows, columns] = shape
    const toGreen = stride[2]
    const toBlue = 2 * stride[2]
    for (let first = 0; first < columns; first += columnsAtOnce) {
      const end = Math.min(columns, first + columnsAtOnce)
      for (let row = 0; row < rows; row++) {
        let from = offset + row * stride[0] + first * stride[1]
        let to = plane.offset + row * plane.rowStride + first * plane.columnStride
        for (let column = first; column < end; column++) {
          const sum = red[data[from]] + green[data[from + toGreen]] + blue[data[from + toBlue]]
          plane.data[to] = finish ? finish(sum) : sum
          from += stride[1]
          to += plane.columnStride
        }
      }
    }
  }
}
