import type { Samples } from '../work.ts'

/** How a scan is shown; never touches the profile's values. Black and white in the file's units. */
export interface Display {
  black: number
  white: number
  /** Exponent of the tone curve: above 1 opens the dark tones. */
  gamma: number
  channel: 'colour' | 'red' | 'green' | 'blue' | 'grey'
}

/** Tone table from sample value to screen value, [256 or 65536]. */
function toneTable(display: Display, bits: number): Uint8ClampedArray {
  const size = bits === 16 ? 65536 : 256
  const table = new Uint8ClampedArray(size)
  const range = Math.max(1e-9, display.white - display.black)
  for (let value = 0; value < size; value++) {
    const share = Math.min(1, Math.max(0, (value - display.black) / range))
    table[value] = Math.round(255 * Math.pow(share, 1 / display.gamma))
  }
  return table
}

/** Which of the file's channels feed red, green and blue of the screen. */
function channelPlan(display: Display, channels: number): [number, number, number] {
  if (channels < 3) return [0, 0, 0]
  const single = { red: 0, green: 1, blue: 2 }
  if (display.channel === 'colour' || display.channel === 'grey') return [0, 1, 2]
  const channel = single[display.channel]
  return [channel, channel, channel]
}

/**
 * Samples [rows, columns, channels], any strides, to RGBA for the screen: opaque, [rows x columns x 4], row-major.
 */
export function paintSamples(samples: Samples, display: Display, bits: number): Uint8ClampedArray<ArrayBuffer> {
  const [rows, columns, channels] = samples.shape as [number, number, number]
  const [rowStride, columnStride, channelStride] = samples.stride as [number, number, number]
  const { data } = samples
  const tone = toneTable(display, bits)
  const [red, green, blue] = channelPlan(display, channels).map((channel) => channel * channelStride) as [
    number,
    number,
    number,
  ]
  const grey = display.channel === 'grey' && channels >= 3
  const rgba = new Uint8ClampedArray(rows * columns * 4)
  let out = 0
  for (let row = 0; row < rows; row++) {
    let at = samples.offset + row * rowStride
    for (let column = 0; column < columns; column++, at += columnStride, out += 4) {
      if (grey) {
        // BT.709 weights, on the values as scanned: the screen's grey shows what the profile's luminance reads.
        const value = 0.2126 * data[at + red] + 0.7152 * data[at + green] + 0.0722 * data[at + blue]
        rgba[out] = rgba[out + 1] = rgba[out + 2] = tone[Math.round(value)]!
      } else {
        rgba[out] = tone[data[at + red]]!
        rgba[out + 1] = tone[data[at + green]]!
        rgba[out + 2] = tone[data[at + blue]]!
      }
      rgba[out + 3] = 255
    }
  }
  return rgba
}

/**
 * Black and white points that hold the middle 99 % of the samples, so that the narrow grey range of a radiograph fills
 * the screen. The two ends are the 0.5 and 99.5 percentiles of all colour samples (nearest rank).
 */
export function stretchedDisplay(samples: Samples, bits: number): Display {
  const [rows, columns, channels] = samples.shape as [number, number, number]
  const [rowStride, columnStride, channelStride] = samples.stride as [number, number, number]
  const counts = new Uint32Array(bits === 16 ? 65536 : 256)
  const colours = channels < 3 ? 1 : 3
  for (let row = 0; row < rows; row++) {
    for (let column = 0; column < columns; column++) {
      const at = samples.offset + row * rowStride + column * columnStride
      for (let channel = 0; channel < colours; channel++) counts[samples.data[at + channel * channelStride]]++
    }
  }
  const total = rows * columns * colours
  const black = percentile(counts, 0.005 * total)
  const white = percentile(counts, 0.995 * total)
  return { black, white: Math.max(white, black + 1), gamma: 1, channel: 'colour' }
}

function percentile(counts: Uint32Array, rank: number): number {
  let seen = 0
  for (let value = 0; value < counts.length; value++) {
    seen += counts[value]
    if (seen > rank) return value
  }
  return counts.length - 1
}
