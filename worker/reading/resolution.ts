import { memorySource } from './bytes.ts'
import type { ByteSource, StatedResolution } from './scanFile.ts'
import { readDirectory, readFrame, readNumber } from './tiffDirectory.ts'
import type { TiffDirectory, TiffFrame } from './tiffDirectory.ts'

const millimetresPerInch = 25.4

/** A stated resolution, or null where the figures are not usable ones. */
export function stated(x: number, y: number, perMillimetre: number, source: string): StatedResolution | null {
  const xPerMm = x / perMillimetre
  const yPerMm = y / perMillimetre
  return xPerMm > 0 && yPerMm > 0 && xPerMm < 1e6 && yPerMm < 1e6 ? { xPerMm, yPerMm, source } : null
}

/** XResolution, YResolution and ResolutionUnit of a TIFF directory (TIFF 6.0, section 8); unit 1 gives no scale. */
export async function tiffResolution(
  frame: TiffFrame,
  directory: TiffDirectory,
  where: string,
): Promise<StatedResolution | null> {
  const x = await readNumber(frame, directory, 282, NaN)
  const y = await readNumber(frame, directory, 283, x)
  const unit = await readNumber(frame, directory, 296, 2)
  if (unit === 2) return stated(x, y, millimetresPerInch, `${where}, per inch`)
  if (unit === 3) return stated(x, y, 10, `${where}, per centimetre`)
  return null
}

/** pHYs of a PNG (PNG specification, 11.3.4.3): whole pixels per metre, or only the shape of a pixel. */
export function pngResolution(chunk: Uint8Array): StatedResolution | null {
  if (chunk.length < 9 || chunk[8] !== 1) return null
  const view = new DataView(chunk.buffer, chunk.byteOffset, chunk.byteLength)
  return stated(view.getUint32(0), view.getUint32(4), 1000, 'PNG pHYs, per metre')
}

/** Density of a JFIF header (ITU-T T.871, 10.1); unit 0 is only the shape of a pixel. */
export function jfifResolution(segment: Uint8Array): StatedResolution | null {
  const x = (segment[8] << 8) | segment[9]
  const y = (segment[10] << 8) | segment[11]
  if (segment[7] === 1) return stated(x, y, millimetresPerInch, 'JFIF density, per inch')
  if (segment[7] === 2) return stated(x, y, 10, 'JFIF density, per centimetre')
  return null
}

/** What an Exif block says about the picture it comes with. Orientation 1 is upright. */
export interface Exif {
  resolution: StatedResolution | null
  orientation: number
}

/** Exif is a small TIFF file inside another file; one that cannot be read says nothing. */
export async function readExif(block: Uint8Array): Promise<Exif> {
  const source: ByteSource = memorySource(block)
  try {
    const frame = await readFrame(source)
    const directory = await readDirectory(frame, frame.first)
    return {
      resolution: await tiffResolution(frame, directory, 'Exif XResolution'),
      orientation: await readNumber(frame, directory, 274, 1),
    }
  } catch {
    return { resolution: null, orientation: 1 }
  }
}

/** A note on an orientation flag: positions are counted in the pixel grid of the file, which viewers may show turned. */
export function orientationNotes(orientation: number): string[] {
  const turned: Record<number, string> = {
    2: 'mirrored',
    3: 'turned by 180 degrees',
    4: 'mirrored and turned by 180 degrees',
    5: 'mirrored and turned by 90 degrees',
    6: 'turned clockwise by 90 degrees',
    7: 'mirrored and turned by 90 degrees',
    8: 'turned counter-clockwise by 90 degrees',
  }
  const how = turned[orientation] as string | undefined
  return how === undefined ? [] : [`the file asks to be shown ${how}; its own pixel grid is used`]
}
