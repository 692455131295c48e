import sharp from 'sharp'
import type { OutputInfo } from 'sharp'
import { Fault } from '../../worker/check.ts'
import { samplesOf } from '../../worker/core/scan.ts'
import type { Description } from '../../worker/reading/describe.ts'
import { cutOut } from '../../worker/reading/levelledScan.ts'
import type { PixelStore } from '../../worker/reading/pixelStore.ts'
import type { ScanLevel } from '../../worker/reading/scanFile.ts'
import type { Region } from '../../worker/units.ts'
import type { Samples } from '../../worker/work.ts'

/** A window kept in memory may take this much; two are kept. */
const windowBytes = 256e6
const keptWindows = 2
/** A scan that is asked for in ever new places is decoded once and kept, if it takes no more than this. */
const wholeBytes = 1e9
const missesBeforeWhole = 3

interface Window {
  level: number
  region: Region
  samples: Promise<Samples>
}

/**
 * Samples decoded by sharp, untouched: no colour management, no turning, no change of depth.
 *
 * Every call of sharp decodes a strip TIFF, PNG, JPEG or WebP from its top, while a profile asks for band after band along
 * the core. A request is therefore widened along the scan's longer side to what memory allows, and the window is kept.
 */
export class SharpPixels implements PixelStore {
  readonly levels: ScanLevel[]
  private readonly path: string
  private readonly description: Description
  private windows: Window[] = []
  private misses = 0

  constructor(path: string, description: Description) {
    this.path = path
    this.description = description
    const { width, height } = description.info
    this.levels = description.format === 'tiff' ? description.layout.levels : [{ width, height, shrink: 1 }]
  }

  async read(region: Region, level: number): Promise<Samples> {
    const known = this.windows.find((window) => window.level === level && contains(window.region, region))
    if (known) return cutOut(await known.samples, relative(region, known.region))
    const wanted = this.windowFor(region, level)
    // Nothing is gained by keeping what was asked for whole.
    const all = wanted.width === region.width && wanted.height === region.height
    if (all && this.bytesOf(wanted) > windowBytes) return this.decode(region, level)
    const window = { level, region: wanted, samples: this.decode(wanted, level) }
    this.windows = [window, ...this.windows].slice(0, this.bytesOf(wanted) > windowBytes ? 1 : keptWindows)
    // A failure is told to whoever asked; the next request tries again.
    window.samples.catch(() => (this.windows = this.windows.filter((other) => other !== window)))
    return cutOut(await window.samples, relative(region, wanted))
  }

  rowsOfBand(level: number): number {
    return Math.min(this.levels[level].height, 1024)
  }

  close(): void {
    this.windows = []
  }

  /** The window to read for a request: stretches of the longer side on a fixed grid, so that either direction is served. */
  private windowFor(region: Region, level: number): Region {
    const { width, height } = this.levels[level]
    const whole = { x: 0, y: 0, width, height }
    const direct = this.readsDirectly(level)
    if (!direct && ++this.misses >= missesBeforeWhole && this.bytesOf(whole) <= wholeBytes) return whole
    const alongX = width >= height
    const across = alongX ? region.height : region.width
    const lineBytes = this.bytesOf({ ...region, width: across, height: 1 })
    const most = Math.max(1, Math.floor((direct ? windowBytes / 4 : windowBytes) / lineBytes))
    const [start, length, side] = alongX ? [region.x, region.width, width] : [region.y, region.height, height]
    const from = Math.floor(start / most) * most
    const to = Math.min(side, Math.max(from + most, start + length))
    return alongX ? { ...region, x: from, width: to - from } : { ...region, y: from, height: to - from }
  }

  /** Whether a place in the middle can be read without decoding all that comes before it. */
  private readsDirectly(level: number): boolean {
    if (this.description.format !== 'tiff') return false
    const { image } = this.description.layout.levels[level]
    return image.tiled || image.compression === 'none'
  }

  private bytesOf(region: Region): number {
    const { channels, bits } = this.description.info
    return region.width * region.height * channels * (bits / 8)
  }

  private async decode(region: Region, level: number): Promise<Samples> {
    const { channels, bits, name } = this.description.info
    const settings = {
      ignoreIcc: true,
      limitInputPixels: false,
      unlimited: true,
      sequentialRead: !this.readsDirectly(level),
      ...this.placeOf(level),
    } as const
    // libvips would otherwise answer from what it remembers of a path, even when the file behind it has changed.
    sharp.cache(false)
    let raw: { data: Buffer; info: OutputInfo }
    try {
      raw = await sharp(this.path, settings)
        .extract({ left: region.x, top: region.y, width: region.width, height: region.height })
        .toColourspace(colourSpace(channels, bits))
        .raw({ depth: bits === 16 ? 'ushort' : 'uchar' })
        .toBuffer({ resolveWithObject: true })
    } catch (error) {
      const reason = error instanceof Error ? error.message.split('\n')[0].trim() : String(error)
      throw new Fault(
        'unreadable',
        'image data',
        name,
        `the file is damaged: image data cannot be decoded (${reason}). Copy it again from its source.`,
      )
    }
    const { data, info } = raw
    const values =
      bits === 16
        ? new Uint16Array(data.buffer, data.byteOffset, data.length / 2)
        : new Uint8Array(data.buffer, data.byteOffset, data.length)
    return samplesOf(pickChannels(values, info.channels, channels), region.width, region.height, channels)
  }

  private placeOf(level: number): { page?: number; subifd?: number } {
    if (this.description.format !== 'tiff') return {}
    const { place } = this.description.layout.levels[level]
    return 'page' in place ? { page: place.page } : { subifd: place.subIfd }
  }
}

/** The colour space in which sharp hands out the samples as they are. It has none for 8-bit grey with alpha. */
export function colourSpace(channels: number, bits: number): string {
  if (bits === 16) return channels >= 3 ? 'rgb16' : 'grey16'
  return channels === 1 ? 'b-w' : 'srgb'
}

/** Grey that sharp has spread to three equal channels is taken back to one; alpha is its last. */
function pickChannels(values: Uint8Array | Uint16Array, given: number, wanted: number): Uint8Array | Uint16Array {
  if (given === wanted) return values
  if (!(wanted <= 2 && given === wanted + 2)) {
    throw new Fault('internal', 'channels', given, `sharp gave ${given} channels where ${wanted} were expected`)
  }
  const picked = values.slice(0, (values.length / given) * wanted)
  for (let from = 0, to = 0; from < values.length; from += given) {
    picked[to++] = values[from]
    if (wanted === 2) picked[to++] = values[from + given - 1]
  }
  return picked
}

function contains(outer: Region, inner: Region): boolean {
  return (
    inner.x >= outer.x &&
    inner.y >= outer.y &&
    inner.x + inner.width <= outer.x + outer.width &&
    inner.y + inner.height <= outer.y + outer.height
  )
}

function relative(region: Region, window: Region): Region {
  return { ...region, x: region.x - window.x, y: region.y - window.y }
}
