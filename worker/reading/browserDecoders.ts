import type { DecodedShape, Decoders } from './decoders.ts'
import { readStraightAlpha } from './straightAlpha.ts'

/** Most pixels read back from a canvas at once. */
const bandPixels = 4 << 20
/** Canvases kept for the next block: making one costs more than filling it. */
const mostSpare = 4
const spare: OffscreenCanvasRenderingContext2D[] = []

/** The browser's own image decoder, told to leave colours, alpha and orientation alone. */
export const browserDecoders: Decoders = {
  async decodeImage(file, shape) {
    const bitmap = await createImageBitmap(file, { colorSpaceConversion: 'none', premultiplyAlpha: 'none' })
    try {
      if (bitmap.width !== shape.width || bitmap.height !== shape.height) {
        throw new Error(`decoded to ${bitmap.width} x ${bitmap.height}`)
      }
      return shape.channels === 4 ? await readStraightAlpha(bitmap) : readBack(bitmap, shape)
    } finally {
      bitmap.close()
    }
  },
}

function readBack(bitmap: ImageBitmap, { width, height, channels }: DecodedShape): Uint8Array {
  const samples = new Uint8Array(width * height * channels)
  const rows = Math.min(height, Math.max(1, Math.floor(bandPixels / width)))
  const context = takeContext(width, rows)
  for (let y = 0; y < height; y += rows) {
    const count = Math.min(rows, height - y)
    context.drawImage(bitmap, 0, -y)
    const { data } = context.getImageData(0, 0, width, count)
    pick(data, samples.subarray(y * width * channels), channels)
  }
  if (spare.length < mostSpare) spare.push(context)
  return samples
}

/** Keeps the colours of RGBA pixels, or the first of three equal ones for grey. */
function pick(rgba: Uint8ClampedArray, samples: Uint8Array, channels: number): void {
  if (channels === 3) {
    for (let from = 0, to = 0; from < rgba.length; from += 4) {
      samples[to++] = rgba[from]
      samples[to++] = rgba[from + 1]
      samples[to++] = rgba[from + 2]
    }
  } else {
    for (let from = 0, to = 0; from < rgba.length; from += 4) samples[to++] = rgba[from]
  }
}

/** A drawing context that keeps its pixels in main memory and never blends. */
function takeContext(width: number, height: number): OffscreenCanvasRenderingContext2D {
  const at = spare.findIndex(({ canvas }) => canvas.width === width && canvas.height === height)
  if (at >= 0) return spare.splice(at, 1)[0]
  if (spare.length === mostSpare) spare.shift()
  const context = new OffscreenCanvas(width, height).getContext('2d', { willReadFrequently: true })
  if (!context) throw new Error('no canvas can be had')
  context.globalCompositeOperation = 'copy'
  context.imageSmoothingEnabled = false
  return context
}
