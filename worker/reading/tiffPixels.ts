import { samplesOf } from '../core/scan.ts'
import type { Region } from '../units.ts'
import type { Samples } from '../work.ts'
import { BlockCache } from './blockCache.ts'
import type { DecodePool } from './decodePool.ts'
import type { Decoders } from './decoders.ts'
import { samplesArray } from './pixelStore.ts'
import type { PixelStore } from './pixelStore.ts'
import type { ByteSource } from './scanFile.ts'
import type { TiffLayout } from './tiff.ts'
import { decodeBlock } from './tiffBlock.ts'
import type { BlockSamples } from './tiffBlock.ts'
import { rowsOfBlock } from './tiffImage.ts'
import type { TiffImage } from './tiffImage.ts'
import { bandsOfStrip } from './tiffStrip.ts'
import { pacer } from './turns.ts'

const cacheBytes = 128 << 20
/** Blocks that follow one another in the file are read at once, up to these sizes packed and unpacked. */
const groupBytes = 4 << 20
const groupUnpackedBytes = 16 << 20
const largestGap = 64 << 10
/** For a pass over a level, about this much is read at once: several blocks, so that there is something to share out. */
const bandBytes = 16 << 20
/** Groups in work at the same time: while one waits for the disk or the platform's decoder, another is unpacked. */
const groupsAtOnce = 4
/** Fewer blocks than this are decoded on the spot: a picture's first tiles should not wait for a worker to start. */
const fewBlocks = 5

/** The samples of a TIFF, read from the file block by block as regions are asked for. */
export class TiffPixels implements PixelStore {
  readonly levels: TiffLayout['levels']
  private readonly source: ByteSource
  private readonly decoders: Decoders
  private readonly cache = new BlockCache<BlockSamples>(cacheBytes)
  private stream: StripStream | null = null
  private unpacking: Promise<void> = Promise.resolve()
  private readonly pace = pacer()

  constructor(source: ByteSource, layout: TiffLayout, decoders: Decoders) {
    this.source = source
    this.levels = layout.levels
    this.decoders = decoders
  }

  async read(region: Region, level: number): Promise<Samples> {
    const { image } = this.levels[level]
    const output = samplesArray(image.bits, region.width * region.height * image.channels)
    const indices = blocksOf(image, region)
    const groups = groupBlocks(image, indices)
    const pool = indices.length < fewBlocks || image.compression === 'none' ? undefined : this.decoders.pool
    let next = 0
    const worker = async () => {
      while (next < groups.length) {
        const group = groups[next++]
        for (const [index, block] of this.load(level, group, pool)) {
          copyBlock(image, index, await block, region, output)
        }
      }
    }
    await Promise.all(Array.from({ length: image.partsOfStrip > 1 ? 1 : groupsAtOnce }, worker))
    return samplesOf(output, region.width, region.height, image.channels)
  }

  rowsOfBand(level: number): number {
    const { blockHeight, height, width, channels, bits } = this.levels[level].image
    const bytes = width * blockHeight * channels * (bits / 8)
    return Math.min(height, blockHeight * Math.max(1, Math.floor(bandBytes / bytes)))
  }

  close(): void {
    this.cache.clear()
    this.stream = null
  }

  /** The blocks of a group, from the cache or on their way. */
  private load(level: number, group: number[], pool?: DecodePool): Map<number, Promise<BlockSamples>> {
    const { image } = this.levels[level]
    const blocks = new Map<number, Promise<BlockSamples>>()
    const missing: number[] = []
    for (const index of group) {
      const cached = this.cache.get(`${level}/${index}`)
      if (cached) blocks.set(index, cached)
      else missing.push(index)
    }
    if (missing.length === 0) return blocks
    const packed = image.partsOfStrip > 1 ? null : this.readPacked(image, missing)
    for (const index of missing) {
      const block = packed
        ? packed.then(
            (bytes) => pool?.decodeBlock(image, index, bytes(index)) ?? this.decode(image, index, bytes(index)),
          )
        : this.band(image, level, index)
      this.cache.set(`${level}/${index}`, block, blockBytes(image, index))
      blocks.set(index, block)
    }
    return blocks
  }

  /** What the platform decodes runs side by side; what we unpack ourselves goes one by one, with turns for messages between. */
  private decode(image: TiffImage, index: number, packed: Uint8Array): Promise<BlockSamples> {
    if (image.compression === 'deflate' || image.compression === 'jpeg') {
      return decodeBlock(image, index, packed, this.decoders)
    }
    const turn = this.unpacking.then(this.pace).then(() => decodeBlock(image, index, packed, this.decoders))
    this.unpacking = turn.then(
      () => undefined,
      () => undefined,
    )
    return turn
  }

  /** Reads the packed bytes of neighbouring blocks at once. */
  private async readPacked(image: TiffImage, indices: number[]): Promise<(index: number) => Uint8Array> {
    const from = Math.min(...indices.map((index) => image.offsets[index]))
    const to = Math.max(...indices.map((index) => image.offsets[index] + image.byteCounts[index]))
    const bytes = await this.source.read(from, to - from)
    return (index) => bytes.subarray(image.offsets[index] - from, image.offsets[index] + image.byteCounts[index] - from)
  }

  /** A band of a strip that is too large to be unpacked at once; the bands that pass before it are kept as well. */
  private band(image: TiffImage, level: number, index: number): Promise<BlockSamples> {
    const inPlane = index % (image.across * image.down)
    const first = index - (inPlane % image.partsOfStrip)
    if (this.stream?.image !== image || this.stream.first !== first) {
      this.stream = new StripStream(this.source, image, first)
    }
    return this.stream.band(index, (passed, block) => {
      this.cache.set(`${level}/${passed}`, Promise.resolve(block), blockBytes(image, passed))
    })
  }
}

/** One large strip being unpacked; goes on where it stands when the next band is asked for, and starts again for an earlier one. */
class StripStream {
  readonly image: TiffImage
  readonly first: number
  private readonly source: ByteSource
  private bands: AsyncGenerator<BlockSamples>
  private next: number
  private last: Promise<unknown> = Promise.resolve()

  constructor(source: ByteSource, image: TiffImage, first: number) {
    this.source = source
    this.image = image
    this.first = first
    this.next = first
    this.bands = bandsOfStrip(source, image, first)
  }

  /** Requests wait for one another: there is one place in the strip. */
  band(index: number, onPassed: (index: number, block: BlockSamples) => void): Promise<BlockSamples> {
    const turn = this.last.then(() => this.advance(index, onPassed))
    this.last = turn.catch(() => undefined)
    return turn
  }

  private async advance(index: number, onPassed: (index: number, block: BlockSamples) => void): Promise<BlockSamples> {
    if (index < this.next) {
      await this.bands.return(undefined)
      this.bands = bandsOfStrip(this.source, this.image, this.first)
      this.next = this.first
    }
    for (;;) {
      const step = await this.bands.next()
      if (step.done) throw new Error(`band ${index} lies behind the end of its strip`)
      const at = this.next++
      if (at === index) return step.value
      onPassed(at, step.value)
    }
  }
}

/** Indices of the blocks that a region touches, plane after plane, in row order. */
function blocksOf(image: TiffImage, region: Region): number[] {
  const left = Math.floor(region.x / image.blockWidth)
  const right = Math.floor((region.x + region.width - 1) / image.blockWidth)
  const top = Math.floor(region.y / image.blockHeight)
  const bottom = Math.floor((region.y + region.height - 1) / image.blockHeight)
  const indices: number[] = []
  for (let plane = 0; plane < image.planes; plane++) {
    for (let row = top; row <= bottom; row++) {
      for (let column = left; column <= right; column++) {
        indices.push((plane * image.down + row) * image.across + column)
      }
    }
  }
  return indices
}

/** Runs of blocks that stand next to one another in the file. */
function groupBlocks(image: TiffImage, indices: number[]): number[][] {
  if (image.partsOfStrip > 1) return indices.map((index) => [index])
  const groups: number[][] = []
  let from = 0
  let end = 0
  let unpacked = 0
  for (const index of indices) {
    const offset = image.offsets[index]
    const bytes = blockBytes(image, index)
    const near = offset >= end && offset - end <= largestGap
    const small = offset + image.byteCounts[index] - from <= groupBytes && unpacked + bytes <= groupUnpackedBytes
    if (groups.length > 0 && near && small) groups.at(-1)!.push(index)
    else {
      groups.push([index])
      from = offset
      unpacked = 0
    }
    end = offset + image.byteCounts[index]
    unpacked += bytes
  }
  return groups
}

/** Bytes of a decoded block in memory. */
function blockBytes(image: TiffImage, index: number): number {
  const rows = rowsOfBlock(image, Math.floor((index % (image.across * image.down)) / image.across))
  return image.blockWidth * rows * (image.planes > 1 ? 1 : image.channels) * (image.bits / 8)
}

/** Copies what a block and a region have in common into the region's samples. */
function copyBlock(image: TiffImage, index: number, block: BlockSamples, region: Region, output: BlockSamples): void {
  const { across, down, blockWidth, blockHeight, channels, planes } = image
  const plane = Math.floor(index / (across * down))
  const left = (index % across) * blockWidth
  const top = Math.floor((index % (across * down)) / across) * blockHeight
  const x0 = Math.max(left, region.x)
  const x1 = Math.min(left + blockWidth, region.x + region.width)
  const y1 = Math.min(top + rowsOfBlock(image, Math.floor(top / blockHeight)), region.y + region.height)
  for (let y = Math.max(top, region.y); y < y1; y++) {
    const to = ((y - region.y) * region.width + (x0 - region.x)) * channels
    const from = (y - top) * blockWidth + (x0 - left)
    if (planes === 1) output.set(block.subarray(from * channels, (from + x1 - x0) * channels), to)
    else for (let i = 0; i < x1 - x0; i++) output[to + i * channels + plane] = block[from + i]
  }
}
