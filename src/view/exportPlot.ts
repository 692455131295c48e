import { prepareCanvas } from './canvasSurface.ts'
import type { Frame, Painter } from './surface.ts'
import { escapeXml, svgSurface } from './svgSurface.ts'
import { printTheme } from './theme.ts'
import type { Theme } from './theme.ts'

/** Units of a figure per millimetre: one unit is a CSS pixel, 1/96 inch, so that 10.7 units of type are 8 points. */
const perMm = 96 / 25.4

export interface FigureSize {
  /** Millimetres on paper. */
  width: number
  height: number
}

export interface FigureOptions {
  theme?: Theme
  /** Short name of the figure, read out by screen readers and kept by drawing programs. */
  title?: string
}

/** A figure as the text of an SVG file in millimetres, black on white unless told otherwise. */
export function exportSvg<Data>(
  painter: Painter<Data>,
  data: Data,
  size: FigureSize,
  { theme = printTheme, title }: FigureOptions = {},
): string {
  const frame = frameOf(size)
  const surface = svgSurface()
  painter(surface, inset(frame), data, theme)
  const name = title === undefined ? '' : `<title>${escapeXml(title)}</title>\n`
  return [
    '<?xml version="1.0" encoding="UTF-8"?>',
    `<svg xmlns="http://www.w3.org/2000/svg" width="${size.width}mm" height="${size.height}mm" viewBox="0 0 ${round(frame.width)} ${round(frame.height)}" font-family="sans-serif" role="img">`,
    `${name}<rect width="100%" height="100%" fill="${escapeXml(theme.ground)}"/>`,
    surface.markup(),
    '</svg>',
    '',
  ].join('\n')
}

/**
 * A figure as an `svg` element for the page, in CSS pixels and the page's own type. `prefix` keeps the ids of several
 * figures apart.
 */
export function inlineSvg<Data>(
  painter: Painter<Data>,
  data: Data,
  width: number,
  height: number,
  theme: Theme,
  { title, prefix = '' }: { title?: string; prefix?: string } = {},
): string {
  const surface = svgSurface(prefix)
  painter(surface, { x: 0, y: 0, width, height }, data, theme)
  const name = title === undefined ? '' : ` aria-label="${escapeXml(title)}"`
  return `<svg width="${round(width)}" height="${round(height)}" viewBox="0 0 ${round(width)} ${round(height)}" font-family="${escapeXml(theme.font)}" role="img"${name}>${surface.markup()}</svg>`
}

/**
 * A figure as a PNG with its resolution written into it, so that it is placed at its size in millimetres.
 * `dotsPerInch` is 300 for print, 600 for line work.
 */
export async function paintToPng<Data>(
  painter: Painter<Data>,
  data: Data,
  size: FigureSize,
  dotsPerInch: 300 | 600,
  { theme = printTheme }: FigureOptions = {},
): Promise<Blob> {
  const frame = frameOf(size)
  const canvas = new OffscreenCanvas(1, 1)
  const surface = prepareCanvas(canvas, frame.width, frame.height, dotsPerInch / 96, theme.font)
  if (!surface)
    throw new Error('The figure could not be drawn: this browser gives no 2D canvas of that size. Save it as SVG.')
  surface.rect(frame, { fill: theme.ground })
  painter(surface, inset(frame), data, theme)
  const png = await canvas.convertToBlob({ type: 'image/png' })
  return new Blob([withResolution(new Uint8Array(await png.arrayBuffer()), dotsPerInch)], { type: 'image/png' })
}

function frameOf(size: FigureSize): Frame {
  return { x: 0, y: 0, width: size.width * perMm, height: size.height * perMm }
}

/** Air around a figure, so that nothing touches the edge of its page. */
const margin = 2 * perMm

function inset(frame: Frame): Frame {
  return {
    x: frame.x + margin,
    y: frame.y + margin,
    width: Math.max(1, frame.width - 2 * margin),
    height: Math.max(1, frame.height - 2 * margin),
  }
}

function round(value: number): number {
  return Math.round(value * 100) / 100
}

/** Length of the PNG signature and its IHDR chunk, after which pHYs may stand (PNG specification, 5.6). */
const afterHeader = 8 + 25

/** A PNG with a pHYs chunk (pixels per metre, both ways) put in after its header. */
export function withResolution(png: Uint8Array, dotsPerInch: number): Uint8Array<ArrayBuffer> {
  const perMetre = Math.round(dotsPerInch / 0.0254)
  const chunk = new Uint8Array(21)
  const view = new DataView(chunk.buffer)
  view.setUint32(0, 9)
  chunk.set([0x70, 0x48, 0x59, 0x73], 4)
  view.setUint32(8, perMetre)
  view.setUint32(12, perMetre)
  chunk[16] = 1
  view.setUint32(17, crc32(chunk.subarray(4, 17)))
  const result = new Uint8Array(png.length + chunk.length)
  result.set(png.subarray(0, afterHeader))
  result.set(chunk, afterHeader)
  result.set(png.subarray(afterHeader), afterHeader + chunk.length)
  return result
}

/** CRC-32 as in the PNG specification, annex D, bit by bit: the chunk has 13 bytes. */
function crc32(bytes: Uint8Array): number {
  let crc = 0xffffffff
  for (const byte of bytes) {
    crc ^= byte
    for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? (crc >>> 1) ^ 0xedb88320 : crc >>> 1
  }
  return (crc ^ 0xffffffff) >>> 0
}
