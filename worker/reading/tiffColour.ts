import { Fault } from '../check.ts'
import { damaged, readNumber, readNumbers } from './tiffDirectory.ts'
import type { TiffDirectory, TiffFrame } from './tiffDirectory.ts'

/** How the samples of a TIFF are stored, and as what they are handed out. */
export interface TiffColour {
  /** Samples stored for a pixel, and bits of each. */
  samples: number
  storedBits: 1 | 2 | 4 | 8 | 16
  /** Channels and bits as handed out. */
  channels: 1 | 2 | 3 | 4
  bits: 8 | 16
  /** Grey stored with white as 0; handed out with white high. */
  inverted: boolean
  /** Colours of a palette image, `channels` bytes each; null for other images. */
  palette: Uint8Array | null
  /** Colours that were multiplied with the alpha channel beside them (ExtraSamples 1); they are handed out as they stand. */
  premultiplied: boolean
  /** JPEG blocks whose three components are red, green and blue as they stand, not YCbCr. */
  jpegRgb: boolean
  notes: string[]
}

const strangers: Record<number, string | undefined> = {
  4: 'a transparency mask', 5: 'CMYK (printing inks)', 8: 'CIE L*a*b*', 9: 'ICC L*a*b*', 10: 'ITU L*a*b*',
  32803: 'a camera mosaic', 34892: 'linear raw',
} // prettier-ignore

/** Only unsigned whole numbers are scan intensities here (SampleFormat 1, or 4: not stated). */
export async function checkSampleKind(frame: TiffFrame, directory: TiffDirectory): Promise<void> {
  const kinds = await readNumbers(frame, directory, 339)
  for (const kind of kinds ?? []) {
    if (kind === 1 || kind === 4) continue
    const what = kind === 2 ? 'signed numbers' : kind === 3 ? 'floating-point numbers' : `samples of kind ${kind}`
    throw new Fault(
      'unsupported',
      'TIFF SampleFormat',
      kind,
      `the TIFF holds ${what}; unsigned 8- or 16-bit samples are read. Convert it to 16-bit grey first.`,
    )
  }
}

/** Reads BitsPerSample, SamplesPerPixel, PhotometricInterpretation, ExtraSamples and ColorMap, and refuses what is no scan. */
export async function readColour(frame: TiffFrame, directory: TiffDirectory, compression: string): Promise<TiffColour> {
  const samples = await readNumber(frame, directory, 277, 1)
  const storedBits = await readBits(frame, directory, samples)
  const photometric = await readNumber(frame, directory, 262, samples >= 3 ? 2 : 1)
  const what = `${samples} samples of ${storedBits} bits`
  if (compression === 'jpeg' && storedBits !== 8) throw notRead('JPEG compression', what)
  const extra = samples === 2 || samples === 4 ? await readNumber(frame, directory, 338, 0) : null
  const base = {
    samples,
    storedBits,
    inverted: false,
    palette: null,
    premultiplied: extra === 1,
    jpegRgb: false,
    notes: alphaNotes(extra),
  }
  const bits = storedBits === 16 ? 16 : 8
  if (photometric === 0 || photometric === 1) {
    if (samples > 2 || (samples === 2 && (storedBits < 8 || compression === 'jpeg'))) throw notRead('grey', what)
    const inverted = photometric === 0
    const notes = inverted
      ? ['stored with white as 0 (WhiteIsZero); values are turned round so that high is light']
      : []
    return { ...base, channels: samples as 1 | 2, bits, inverted, notes }
  }
  if (photometric === 2 || (photometric === 6 && compression === 'jpeg')) {
    if (!(samples === 3 || (samples === 4 && compression !== 'jpeg')) || storedBits < 8) throw notRead('colour', what)
    if (photometric === 6) await checkPlanes(frame, directory)
    return { ...base, channels: samples, bits, jpegRgb: photometric === 2 }
  }
  if (photometric === 3) {
    if (samples !== 1 || storedBits === 16 || compression === 'jpeg') throw notRead('palette colours', what)
    return { ...base, ...(await readPalette(frame, directory, storedBits)), bits: 8 }
  }
  const name = photometric === 6 ? 'YCbCr without JPEG compression' : (strangers[photometric] ?? `kind ${photometric}`)
  throw new Fault(
    'unsupported',
    'TIFF colours',
    photometric,
    `the TIFF holds ${name}; grey, RGB and palette colours are read. Save the original again in RGB or grey.`,
  )
}

async function readBits(
  frame: TiffFrame,
  directory: TiffDirectory,
  samples: number,
): Promise<TiffColour['storedBits']> {
  if (!(samples >= 1 && samples <= 4)) {
    throw new Fault(
      'unsupported',
      'TIFF SamplesPerPixel',
      samples,
      `the TIFF holds ${samples} samples for each pixel; 1 to 4 are read. Export grey or RGB.`,
    )
  }
  const stated = (await readNumbers(frame, directory, 258)) ?? Float64Array.of(1)
  const bits = stated[0]
  if (stated.length === 0 || stated.some((other) => other !== bits)) {
    throw new Fault(
      'unsupported',
      'TIFF BitsPerSample',
      stated.join(', '),
      `the TIFF stores its channels with different numbers of bits (${stated.slice(0, 5).join(', ')}). Export grey or RGB.`,
    )
  }
  if (bits !== 1 && bits !== 2 && bits !== 4 && bits !== 8 && bits !== 16) {
    throw new Fault(
      'unsupported',
      'TIFF BitsPerSample',
      bits,
      `the TIFF has ${bits} bits a sample; 1, 2, 4, 8 and 16 are read. Convert it to 16 bits first.`,
    )
  }
  return bits
}

async function checkPlanes(frame: TiffFrame, directory: TiffDirectory): Promise<void> {
  if ((await readNumber(frame, directory, 284, 1)) === 1) return
  throw new Fault(
    'unsupported',
    'TIFF PlanarConfiguration',
    2,
    'the TIFF stores YCbCr colours in separate planes, which is not read. Save it again with interleaved samples.',
  )
}

/** A colour map (TIFF 6.0, section 5): 16-bit reds, then greens, then blues; the upper eight bits are the colour. */
async function readPalette(
  frame: TiffFrame,
  directory: TiffDirectory,
  storedBits: number,
): Promise<Pick<TiffColour, 'channels' | 'palette'>> {
  const map = await readNumbers(frame, directory, 320)
  const count = 1 << storedBits
  if (map?.length !== 3 * count) {
    throw damaged(
      'TIFF ColorMap',
      map?.length ?? 0,
      `has ${map?.length ?? 0} values, not the ${3 * count} of ${storedBits} bits`,
    )
  }
  // Some writers fill in 8-bit colours, against the standard; then nothing reaches the upper bits.
  const divisor = map.some((value) => value >= 256) ? 256 : 1
  const colours = map.map((value) => Math.floor(value / divisor))
  const grey = colours
    .subarray(0, count)
    .every((red, i) => red === colours[count + i] && red === colours[2 * count + i])
  const channels = grey ? 1 : 3
  const palette = Uint8Array.from(
    { length: count * channels },
    (_, i) => colours[(i % channels) * count + Math.floor(i / channels)],
  )
  return { channels, palette }
}

function alphaNotes(extra: number | null): string[] {
  if (extra === null) return []
  return extra === 1
    ? ['the file has an alpha channel that its colours were multiplied with; the colours are used as they stand']
    : ['the file has an alpha channel; it is not used in profiles']
}

function notRead(kind: string, what: string): Fault {
  return new Fault(
    'unsupported',
    'TIFF samples',
    what,
    `the TIFF holds ${kind} in ${what}, which is not read. Export 8- or 16-bit grey or RGB.`,
  )
}
