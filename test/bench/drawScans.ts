import { existsSync, mkdirSync, renameSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import sharp from 'sharp'
import type { Sharp } from 'sharp'
import { seededRandom } from '../../worker/random.ts'
import { writeTiff } from '../fixtures/writeTiff.ts'
import type { TiffToWrite } from '../fixtures/writeTiff.ts'

/** A large drawn scan: a laminated core along y. */
export interface DrawnScan {
  name: string
  path: string
  width: number
  height: number
}

const folder = join(tmpdir(), 'winterclay-bench')
const tileSide = 256

const random = seededRandom(7)
const grain = Uint8Array.from({ length: 65_536 }, () => random.below(14))

/** Lamination with a grain, RGB; shape [rows, width, 3], from row `top` on. `shrink` scan pixels lie between two of its own. */
function laminatedRows(width: number, top: number, rows: number, shrink = 1): Uint8Array {
  const data = new Uint8Array(width * rows * 3)
  for (let row = 0, i = 0; row < rows; row++) {
    const y = (top + row) * shrink
    const light = 110 + 40 * Math.sin(y / 6.5) + 20 * Math.sin(y / 391)
    const start = Math.imul(y + 1, 0x9e3779b1) >>> 16
    for (let x = 0; x < width; x++) {
      const value = light + grain[(start + x * 7) & 0xffff]
      data[i++] = value
      data[i++] = value * 0.9
      data[i++] = value * 0.75
    }
  }
  return data
}

async function draw(name: string, width: number, height: number, write: (picture: Sharp) => Sharp): Promise<DrawnScan> {
  mkdirSync(folder, { recursive: true })
  const path = join(folder, name)
  if (!existsSync(path)) {
    const raw = { width, height, channels: 3 } as const
    const picture = sharp(laminatedRows(width, 0, height), { raw, limitInputPixels: false })
    await write(picture).toFile(`${path}.part`)
    renameSync(`${path}.part`, path)
  }
  return { name, path, width, height }
}

/** One level of a pyramid of JPEG tiles: sharp itself writes none beyond the sides that a single JPEG may have. */
async function jpegLevel(width: number, height: number, shrink: number): Promise<TiffToWrite> {
  const across = Math.ceil(width / tileSide)
  const blocks: Uint8Array[] = []
  for (let top = 0; top < height; top += tileSide) {
    const raw = { width: across * tileSide, height: tileSide, channels: 3 } as const
    const band = laminatedRows(raw.width, top, tileSide, shrink)
    const cut = (column: number) => ({ left: column * tileSide, top: 0, width: tileSide, height: tileSide })
    const encode = (column: number) => sharp(band, { raw }).extract(cut(column)).jpeg({ quality: 90 }).toBuffer()
    blocks.push(...(await Promise.all(Array.from({ length: across }, (_, column) => encode(column)))))
  }
  const fields: TiffToWrite['fields'] = [[530, 3, [2, 2]]]
  return {
    width,
    height,
    samples: 3,
    bits: 8,
    data: [],
    photometric: 6,
    compression: 'jpeg',
    tile: [tileSide, tileSide],
    jpegBlocks: blocks,
    fields,
  }
}

async function drawJpegPyramid(name: string, width: number, height: number): Promise<DrawnScan> {
  const path = join(folder, name)
  if (!existsSync(path)) {
    const levels: TiffToWrite[] = []
    for (let shrink = 1; Math.max(width, height) / shrink > 500; shrink *= 2) {
      levels.push(await jpegLevel(Math.ceil(width / shrink), Math.ceil(height / shrink), shrink))
    }
    const [scan, ...next] = levels
    writeFileSync(`${path}.part`, writeTiff({ ...scan, big: true, next }))
    renameSync(`${path}.part`, path)
  }
  return { name, path, width, height }
}

const tiles = { tile: true, tileWidth: 256, tileHeight: 256, pyramid: true, bigtiff: true } as const

/** The scans of the reading bench, drawn once into the folder for temporary files. */
export async function drawScans(): Promise<DrawnScan[]> {
  const of90 = (name: string, write: (picture: Sharp) => Sharp) => draw(name, 3000, 30_000, write)
  return [
    await of90('90 MP strips lzw.tif', (picture) => picture.tiff({ compression: 'lzw', predictor: 'horizontal' })),
    await of90('90 MP strips none.tif', (picture) => picture.tiff({ compression: 'none' })),
    await of90('90 MP tiles deflate.tif', (picture) => picture.tiff({ ...tiles, compression: 'deflate' })),
    await of90('90 MP.png', (picture) => picture.png({ compressionLevel: 4 })),
    await of90('90 MP.jpg', (picture) => picture.jpeg({ quality: 92 })),
    await drawJpegPyramid('600 MP tiles jpeg.tif', 4000, 150_000),
  ]
}
