import { Fault } from '../check.ts'
import { samplesOf } from '../core/scan.ts'
import type { Region } from '../units.ts'
import type { Progress, Samples } from '../work.ts'
import { furtherLevels, makeLevel } from './overviews.ts'
import { samplesArray } from './pixelStore.ts'
import type { PixelStore } from './pixelStore.ts'
import type { Scan, ScanInfo, ScanLevel } from './scanFile.ts'

/** Samples held in memory, as one level. */
export class MemoryPixels implements PixelStore {
  readonly levels: ScanLevel[]
  private readonly samples: Samples

  constructor(samples: Samples) {
    this.samples = samples
    this.levels = [{ width: samples.shape[1], height: samples.shape[0], shrink: 1 }]
  }

  read(region: Region): Promise<Samples> {
    return Promise.resolve(cutOut(this.samples, region))
  }

  rowsOfBand(): number {
    return 256
  }

  close(): void {
    // Memory is given back with the object.
  }
}

/** An open scan over any store: checks regions, and makes the levels that the file does not hold when they are first asked for. */
export class LevelledScan implements Scan {
  readonly info: ScanInfo
  private readonly store: PixelStore
  private readonly made = new Map<number, Promise<PixelStore>>()
  private open = true

  constructor(store: PixelStore, info: Omit<ScanInfo, 'levels'>) {
    this.store = store
    const stored = store.levels.map(({ width, height, shrink }) => ({ width, height, shrink }))
    this.info = { ...info, levels: [...stored, ...furtherLevels(stored, info, store instanceof MemoryPixels)] }
  }

  async readRegion(region: Region, level = 0): Promise<Samples> {
    if (!this.open)
      throw new Fault('conflict', 'scan', this.info.name, `${this.info.name} was closed; open its file again`)
    checkRegion(region, level, this.info.levels)
    if (level < this.store.levels.length) return this.store.read(region, level)
    return (await this.madeLevel(level)).read(region, 0)
  }

  async buildOverview(onProgress?: (progress: Progress) => void, signal?: AbortSignal): Promise<void> {
    const last = this.info.levels.length - 1
    if (last >= this.store.levels.length) await this.madeLevel(last, onProgress, signal)
  }

  close(): void {
    this.open = false
    this.made.clear()
    this.store.close()
  }

  private madeLevel(
    level: number,
    onProgress?: (progress: Progress) => void,
    signal?: AbortSignal,
  ): Promise<PixelStore> {
    const { levels } = this.info
    const first = this.store.levels.length
    const make = async () => {
      const own = level > first
      const store = own ? await this.madeLevel(level - 1, onProgress, signal) : this.store
      const from = own ? 0 : level - 1
      return new MemoryPixels(
        await makeLevel(store, from, levels[level - 1], levels[level], this.info, onProgress, signal),
      )
    }
    const known = this.made.get(level)
    if (known) return known
    const made = make()
    this.made.set(level, made)
    // A level that failed or was cancelled is tried again when it is next asked for.
    made.catch(() => {
      if (this.made.get(level) === made) this.made.delete(level)
    })
    return made
  }
}

/** A copy of a region of samples that lie in row order. */
export function cutOut(samples: Samples, region: Region): Samples {
  const [, width, channels] = samples.shape
  const { data } = samples
  const output = samplesArray(data instanceof Uint16Array ? 16 : 8, region.width * region.height * channels)
  const length = region.width * channels
  for (let row = 0; row < region.height; row++) {
    const from = ((region.y + row) * width + region.x) * channels
    output.set(data.subarray(from, from + length), row * length)
  }
  return samplesOf(output, region.width, region.height, channels)
}

/** A region must lie inside its level, in whole pixels. */
export function checkRegion(region: Region, level: number, levels: ScanLevel[]): void {
  if (!Number.isInteger(level) || level < 0 || level >= levels.length) {
    throw new Fault(
      'argument',
      'level',
      level,
      `level must be a whole number from 0 to ${levels.length - 1}; it is ${level}`,
    )
  }
  const { width, height } = levels[level]
  const { x, y } = region
  const whole = [x, y, region.width, region.height].every((value) => Number.isInteger(value))
  if (whole && x >= 0 && y >= 0 && region.width >= 1 && region.height >= 1) {
    if (x + region.width <= width && y + region.height <= height) return
  }
  const received = `${region.width} x ${region.height} at ${x}, ${y}`
  throw new Fault(
    'argument',
    'region',
    received,
    `region must lie inside level ${level} (${width} x ${height} pixels), in whole pixels; it is ${received}`,
  )
}
