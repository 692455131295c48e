import { Fault } from '../check.ts'

/** Longest side of a scan, pixels: four times the longest core scan we know of. */
export const longestSide = 400_000
/** Most pixels of a scan read block by block. */
export const mostPixels = 4e9
/** Most pixels, and bytes of samples, of a scan that has to be decoded whole (PNG, JPEG, WebP). */
export const mostPixelsWhole = 300e6
export const mostBytesWhole = 1.5e9
/** Most bytes of one decoded tile or strip that cannot be taken apart. */
export const mostBytesBlock = 512e6

/** How a scan that is too large for its format is made readable. */
export const prepareAdvice =
  'Turn it into a tiled, pyramidal TIFF with "npx winterclay prepare SCAN --out FILE" and open that.'

/** Refuses impossible dimensions before anything is allocated for them. Width and height in pixels. */
export function checkDimensions(width: number, height: number, decodedWhole: boolean): void {
  if (!(width >= 1 && height >= 1)) {
    throw new Fault(
      'unreadable',
      'dimensions',
      `${width} x ${height}`,
      `the file says it is ${width} x ${height} pixels: there is no picture in it. Save it again from the program that made it.`,
    )
  }
  if (!(width <= longestSide && height <= longestSide)) {
    throw new Fault(
      'too-large',
      'dimensions',
      `${width} x ${height}`,
      `the file says it is ${width} x ${height} pixels; at most ${longestSide} pixels a side can be read. If the scan is smaller than that, the file is damaged.`,
    )
  }
  const most = decodedWhole ? mostPixelsWhole : mostPixels
  if (!(width * height <= most)) {
    const advice = decodedWhole ? prepareAdvice : 'Cut the scan into sections, or scan at a lower resolution.'
    throw new Fault(
      'too-large',
      'dimensions',
      `${width} x ${height}`,
      `the scan has ${width} x ${height} pixels, ${megapixels(width * height)} million; at most ${megapixels(most)} million can be read from this format. ${advice}`,
    )
  }
}

/** Refuses a whole decode that memory would not hold. */
export function checkWholeBytes(width: number, height: number, channels: number, bits: number): void {
  const bytes = width * height * channels * (bits / 8)
  if (!(bytes <= mostBytesWhole)) {
    throw new Fault(
      'too-large',
      'dimensions',
      `${width} x ${height}`,
      `the scan takes ${Math.round(bytes / 1e6)} MB in memory when it is decoded; at most ${mostBytesWhole / 1e6} MB are used. ${prepareAdvice}`,
    )
  }
}

function megapixels(pixels: number): number {
  return Math.round(pixels / 1e6)
}
