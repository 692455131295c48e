import { open, realpath, rename, rm } from 'node:fs/promises'
import { basename } from 'node:path'
import sharp from 'sharp'
import { Fault } from '../../worker/check.ts'
import { describeScan } from '../../worker/reading/describe.ts'
import type { Description } from '../../worker/reading/describe.ts'
import { argumentFault, textOption, wordsOf } from './arguments.ts'
import { jsonText } from './delivery.ts'
import { inWords } from './files.ts'
import { oneLine } from './oneLine.ts'
import { fileSource, misreadBySharp, openFile } from './sharpScan.ts'
import { colourSpace } from './sharpPixels.ts'
import type { Verb } from './verb.ts'

export const prepare: Verb = {
  name: 'prepare',
  summary: 'write a scan as a tiled, pyramidal TIFF, which opens at once whatever its size',
  help: `npx winterclay prepare SCAN --out FILE

Writes a scan (PNG, JPEG, WebP, TIFF) as a tiled TIFF with reduced copies of itself, compressed without loss.
Samples keep their values and their depth (8 or 16 bits), and the stated resolution is kept; alpha and colour profile are not.

  --out FILE         the TIFF to write
  --json             print what was written as JSON`,
  options: {},
  async run(call) {
    const [scan] = wordsOf(call, 'SCAN')
    const out = textOption(call.options, 'out')
    if (out === null) argumentFault('--out', out, 'give --out FILE, the TIFF to write')
    const written = await prepareScan(scan, out)
    const words = `${scan}: ${written.width} x ${written.height} pixels of ${written.bits} bits written to ${out}`
    process.stdout.write(call.options.json === true ? jsonText({ scan, out, ...written }) : `${oneLine(words)}\n`)
  },
}

export interface Prepared {
  width: number
  height: number
  channels: number
  bits: number
}

/** Writes the scan at `path` as a tiled, pyramidal TIFF. The file appears under its name only when it is complete. */
export async function prepareScan(path: string, out: string): Promise<Prepared> {
  const description = await describeFile(path)
  await checkApart(path, out)
  const { width, height, bits, resolution } = description.info
  const channels = description.info.channels >= 3 ? 3 : 1
  const perMm = resolution ? { xres: resolution.xPerMm, yres: resolution.yPerMm, resolutionUnit: 'cm' as const } : {}
  const partial = `${out}.part`
  try {
    await sharp(path, {
      ignoreIcc: true,
      limitInputPixels: false,
      unlimited: true,
      sequentialRead: true,
      ...(description.format === 'tiff' ? placeOf(description) : {}),
    })
      .removeAlpha()
      .toColourspace(colourSpace(channels, bits))
      .tiff({
        compression: 'deflate',
        predictor: 'horizontal',
        tile: true,
        tileWidth: 256,
        tileHeight: 256,
        pyramid: true,
        // A third more for the reduced copies; offsets of a plain TIFF end at 4 GB.
        bigtiff: width * height * channels * (bits / 8) * 1.4 > 3e9,
        ...perMm,
      })
      .toFile(partial)
    await rename(partial, out)
  } catch (error) {
    await rm(partial, { force: true })
    throw new Fault(
      'unreadable',
      'scan',
      path,
      `${path} could not be written to ${out}: ${inWords(error).split('\n')[0]}`,
    )
  }
  return { width, height, channels, bits }
}

async function describeFile(path: string): Promise<Description> {
  const handle = await openFile(path)
  try {
    // Unlike in the page, nothing is held in memory here: PNG and JPEG may be of any size.
    const description = await describeScan(fileSource(handle, (await handle.stat()).size), basename(path), false)
    if (!misreadBySharp(description)) return description
    throw new Fault(
      'unsupported',
      'scan',
      path,
      `${path} stores its channels in separate planes or multiplied by alpha. Save it again interleaved and without alpha.`,
    )
  } finally {
    await handle.close()
  }
}

function placeOf(description: Description & { format: 'tiff' }): { page?: number } {
  const { place } = description.layout.levels[0]
  return 'page' in place ? { page: place.page } : {}
}

/** A scan must not be written over itself. */
async function checkApart(path: string, out: string): Promise<void> {
  const there = await realpath(out).catch(() => null)
  if (there !== null && there === (await realpath(path))) {
    argumentFault('--out', out, `--out names the scan itself, ${out}; give another file`)
  }
  const handle = await open(`${out}.part`, 'w').catch((error: unknown) => {
    throw new Fault('argument', '--out', out, `cannot write ${out}: ${inWords(error)}`)
  })
  await handle.close()
}
