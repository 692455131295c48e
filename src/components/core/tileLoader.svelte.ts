import type { Display } from '../../../worker/core/display.ts'
import type { WorkerClient } from '../../session/workerClient.ts'
import { TileCache } from '../../view/tileCache.ts'
import type { Tile } from '../../view/tiles.ts'
import type { TileGrid } from '../../view/strip/data.ts'
import type { Picture } from '../../view/surface.ts'

/** Bitmaps of tiles kept in memory, bytes. */
const budget = 192e6
/** Tiles asked of the worker at a time: few, so that a fast scroll does not queue what has gone out of sight. */
const atOnce = 4

/** Fetches the tiles the scan column needs and keeps their bitmaps. `arrived` counts up so that a painter can follow. */
export class TileLoader {
  #client: WorkerClient
  #cache = new TileCache(budget, (picture) => {
    if (picture.source instanceof ImageBitmap) picture.source.close()
  })
  #wanted: { tile: Tile; keep: boolean }[] = []
  #underWay = new Set<string>()
  #grid: TileGrid | null = null
  #display: Display | null = null
  #generation = 0
  arrived = $state(0)

  constructor(client: WorkerClient) {
    this.#client = client
  }

  get = (key: string): Picture | undefined => this.#cache.get(key)

  /** Sets what is wanted now, most wanted first; tiles no longer wanted are not asked for. */
  want(grid: TileGrid, display: Display, tiles: readonly Tile[], coarse: readonly Tile[]): void {
    if (display !== this.#display || grid.scan !== this.#grid?.scan) {
      this.#cache.clear()
      this.#generation++
      this.#underWay.clear()
    }
    this.#grid = grid
    this.#display = display
    this.#wanted = [
      ...coarse.map((tile) => ({ tile, keep: true })),
      ...tiles.map((tile) => ({ tile, keep: false })),
    ].filter(({ tile }) => !this.#cache.has(tile.key) && !this.#underWay.has(tile.key))
    while (this.#underWay.size < atOnce && this.#wanted.length > 0) void this.#next()
  }

  async #next(): Promise<void> {
    const next = this.#wanted.shift()
    const grid = this.#grid
    const display = this.#display
    if (!next || !grid || !display) return
    const { tile, keep } = next
    const generation = this.#generation
    this.#underWay.add(tile.key)
    try {
      const { width, height, rgba } = await this.#client.run('tile', {
        scan: grid.scan,
        level: tile.level,
        region: tile.region,
        orientation: grid.orientation,
        display,
      })
      const source = await createImageBitmap(new ImageData(rgba, width, height))
      if (generation === this.#generation) {
        this.#cache.set(tile.key, { width, height, source }, keep)
        this.arrived++
      }
    } catch {
      // A tile that cannot be read leaves its place empty; the job that opened the scan has said why.
    }
    if (generation === this.#generation) this.#underWay.delete(tile.key)
    if (this.#underWay.size < atOnce && this.#wanted.length > 0) void this.#next()
  }
}
