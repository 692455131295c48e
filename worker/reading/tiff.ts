import { Fault } from '../check.ts'
import { orientationNotes, tiffResolution } from './resolution.ts'
import type { ByteSource, ScanLevel, StatedResolution } from './scanFile.ts'
import { damaged, readDirectory, readFrame, readNumber, readNumbers } from './tiffDirectory.ts'
import type { TiffDirectory, TiffFrame } from './tiffDirectory.ts'
import { readTiffImage } from './tiffImage.ts'
import type { TiffImage } from './tiffImage.ts'

/** An image of a pyramid and where it hangs: in the chain of directories, or below the main one. */
export interface TiffLevel extends ScanLevel {
  image: TiffImage
  place: { page: number } | { subIfd: number }
}

/** A TIFF as a scan: its main image, and reduced copies of it, largest first. */
export interface TiffLayout {
  /** levels[0] is the scan itself. */
  levels: TiffLevel[]
  resolution: StatedResolution | null
  notes: string[]
}

/** More pictures in one file than this are not looked at. */
const mostDirectories = 256

interface Found {
  directory: TiffDirectory
  place: TiffLevel['place']
  reduced: boolean
}

/** Reads all directories of a TIFF or BigTIFF and picks the scan and its reduced copies from them. */
export async function readTiffLayout(source: ByteSource): Promise<TiffLayout> {
  const frame = await readFrame(source)
  const notes: string[] = []
  const chain = await readChain(frame, notes)
  const main = chain.find(({ reduced }) => !reduced) ?? chain[0]
  const image = await readTiffImage(frame, main.directory)
  notes.push(...image.notes)
  const pictures = chain.filter(({ reduced }) => !reduced).length
  const others: Found[] = [
    ...chain.filter((found) => found !== main),
    ...(await readSubDirectories(frame, main.directory, notes)),
  ]
  const levels: TiffLevel[] = [{ width: image.width, height: image.height, shrink: 1, image, place: main.place }]
  for (const found of others) {
    const level = await readReduced(frame, found, image, notes)
    if (level && !levels.some(({ shrink }) => shrink === level.shrink)) levels.push(level)
  }
  levels.sort((a, b) => a.shrink - b.shrink)
  const apart = pictures - levels.filter(({ place }) => 'page' in place && !chain[place.page].reduced).length
  if (apart > 0) notes.push(`the file holds ${pictures} pictures; the first is read`)
  notes.push(...orientationNotes(await readNumber(frame, main.directory, 274, 1)))
  return { levels, resolution: await tiffResolution(frame, main.directory, 'TIFF XResolution'), notes }
}

async function readChain(frame: TiffFrame, notes: string[]): Promise<Found[]> {
  const chain: Found[] = []
  const seen = new Set<number>()
  for (let offset = frame.first; offset !== 0;) {
    if (seen.has(offset)) {
      notes.push('the list of pictures in the file runs in a circle; each is looked at once')
      break
    }
    if (seen.size === mostDirectories) break
    seen.add(offset)
    let directory: TiffDirectory
    try {
      directory = await readDirectory(frame, offset)
    } catch (error) {
      // Without its first directory the file is nothing; a broken later one takes only further pictures with it.
      if (chain.length === 0 || !(error instanceof Fault)) throw error
      notes.push(`a further picture in the file cannot be read: ${error.message}`)
      break
    }
    chain.push({ directory, place: { page: chain.length }, reduced: await isReduced(frame, directory) })
    offset = directory.next
  }
  if (chain.length === 0) throw damaged('TIFF', frame.first, 'holds no picture')
  return chain
}

async function readSubDirectories(frame: TiffFrame, directory: TiffDirectory, notes: string[]): Promise<Found[]> {
  const found: Found[] = []
  try {
    const offsets = (await readNumbers(frame, directory, 330)) ?? new Float64Array(0)
    for (const [subIfd, offset] of offsets.subarray(0, mostDirectories).entries()) {
      found.push({ directory: await readDirectory(frame, offset), place: { subIfd }, reduced: true })
    }
  } catch (error) {
    if (!(error instanceof Fault)) throw error
    notes.push(`a reduced copy in the file cannot be read: ${error.message}`)
  }
  return found
}

/** NewSubfileType bit 0, or the older SubfileType 2: a reduced copy of another picture in the file. */
async function isReduced(frame: TiffFrame, directory: TiffDirectory): Promise<boolean> {
  if (directory.fields.has(254)) return ((await readNumber(frame, directory, 254, 0)) & 1) === 1
  return (await readNumber(frame, directory, 255, 1)) === 2
}

/** The directory as a level of the main image, or null where it is something else (a thumbnail, a mask, another picture). */
async function readReduced(
  frame: TiffFrame,
  found: Found,
  main: TiffImage,
  notes: string[],
): Promise<TiffLevel | null> {
  const { directory, place } = found
  try {
    const width = await readNumber(frame, directory, 256, 0)
    const height = await readNumber(frame, directory, 257, 0)
    const shrink = Math.round(main.width >= main.height ? main.width / width : main.height / height)
    if (!(shrink >= 2 && fits(width, main.width, shrink) && fits(height, main.height, shrink))) return null
    const image = await readTiffImage(frame, directory)
    if (image.channels !== main.channels || image.bits !== main.bits || image.inverted !== main.inverted) return null
    return { width, height, shrink, image, place }
  } catch (error) {
    if (!(error instanceof Fault)) throw error
    notes.push(`a reduced copy in the file cannot be read and is not used: ${error.message}`)
    return null
  }
}

/** Writers round the sides of reduced copies up or down, some at each halving. */
function fits(side: number, mainSide: number, shrink: number): boolean {
  return side >= 1 && Math.abs(side * shrink - mainSide) < 2 * shrink && side >= Math.floor(mainSide / shrink)
}
