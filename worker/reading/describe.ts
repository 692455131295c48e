import { checkWholeBytes } from './limits.ts'
import { readJpegLayout } from './jpeg.ts'
import type { JpegLayout } from './jpeg.ts'
import { pagedSource } from './bytes.ts'
import { readPngLayout } from './png.ts'
import type { PngLayout } from './png.ts'
import type { ByteSource, ScanInfo, StatedResolution } from './scanFile.ts'
import { sniff } from './sniff.ts'
import { readTiffLayout } from './tiff.ts'
import type { TiffLayout } from './tiff.ts'
import { readWebpLayout } from './webp.ts'
import type { WebpLayout } from './webp.ts'

/** All that a scan's headers say, checked: the same for the page and for the headless command. No pixel is decoded for it. */
export type Description = { info: Omit<ScanInfo, 'sha256' | 'levels'> } & (
  | { format: 'png'; layout: PngLayout }
  | { format: 'jpeg'; layout: JpegLayout }
  | { format: 'webp'; layout: WebpLayout }
  | { format: 'tiff'; layout: TiffLayout }
)

/**
 * Finds out what a file is and whether nothing of it is missing. Throws a Fault that says what is wrong with it and what to
 * do. `whole`: a PNG, JPEG or WebP will be held in memory, and one that is too large for that is refused.
 */
export async function describeScan(file: ByteSource, name: string, whole = true): Promise<Description> {
  const description = await describeFormat(file, name, whole)
  description.info.notes.push(...placeholderNotes(description.info.resolution))
  return description
}

async function describeFormat(file: ByteSource, name: string, whole: boolean): Promise<Description> {
  const source = pagedSource(file)
  const { format, notes } = await sniff(source, name)
  const named = { name, bytes: file.size }
  if (format === 'tiff') {
    const layout = await readTiffLayout(source)
    const { width, height, channels, bits } = layout.levels[0].image
    const shape = { width, height, channels, bits, resolution: layout.resolution }
    return { format, layout, info: { ...named, ...shape, format, notes: [...notes, ...layout.notes] } }
  }
  if (format === 'png') {
    const layout = await readPngLayout(source, whole)
    const { width, height, channels, bits, resolution } = layout
    const shape = { width, height, channels, bits, resolution }
    return {
      format,
      layout,
      info: { ...named, ...shape, format, notes: [...notes, ...layout.notes, ...alphaNotes(channels)] },
    }
  }
  const described =
    format === 'jpeg'
      ? { format, layout: await readJpegLayout(source, whole) }
      : { format, layout: await readWebpLayout(source) }
  const { width, height, channels, resolution } = described.layout
  if (whole) checkWholeBytes(width, height, channels, 8)
  const shape = { width, height, channels, bits: 8 as const, resolution }
  return {
    ...described,
    info: { ...named, ...shape, format, notes: [...notes, ...described.layout.notes, ...alphaNotes(channels)] },
  }
}

/** 72 and 96 per inch stand in countless files whose writers knew no resolution (common practice, no source). */
function placeholderNotes(resolution: StatedResolution | null): string[] {
  const perInch = resolution ? Math.round(resolution.xPerMm * 25.4) : 0
  if (perInch !== 72 && perInch !== 96) return []
  return [
    `the stated resolution, ${perInch} per inch, is what many programs write when they know none: check it on a ruler`,
  ]
}

function alphaNotes(channels: number): string[] {
  return channels === 2 || channels === 4 ? ['the file has an alpha channel; it is not used in profiles'] : []
}
