import type { Picture } from './surface.ts'

interface Held {
  picture: Picture
  bytes: number
  kept: boolean
}

/**
 * Tile bitmaps within a budget of bytes; the one not looked at for longest goes first. Tiles set with `keep` (the coarsest
 * level, from which everything can be drawn at once, if roughly) stay until the scan is closed.
 */
export class TileCache {
  readonly #budget: number
  readonly #release: (picture: Picture) => void
  /** In the order of last use: a Map remembers the order of insertion. */
  readonly #held = new Map<string, Held>()
  #bytes = 0

  /** `release` frees a bitmap that leaves the cache, for example by `ImageBitmap.close`. */
  constructor(budget: number, release: (picture: Picture) => void = () => undefined) {
    this.#budget = Number.isFinite(budget) ? Math.max(0, budget) : 0
    this.#release = release
  }

  get bytes(): number {
    return this.#bytes
  }

  get size(): number {
    return this.#held.size
  }

  has(key: string): boolean {
    return this.#held.has(key)
  }

  get(key: string): Picture | undefined {
    const held = this.#held.get(key)
    if (!held) return undefined
    this.#held.delete(key)
    this.#held.set(key, held)
    return held.picture
  }

  /** Puts a tile in and lets others go until the budget holds; the newest tile stays even where it alone exceeds it. */
  set(key: string, picture: Picture, keep = false): void {
    this.delete(key)
    const bytes = picture.width * picture.height * 4
    this.#held.set(key, { picture, bytes, kept: keep })
    this.#bytes += bytes
    for (const [oldest, held] of this.#held) {
      if (this.#bytes <= this.#budget) break
      if (!held.kept && oldest !== key) this.delete(oldest)
    }
  }

  delete(key: string): void {
    const held = this.#held.get(key)
    if (!held) return
    this.#held.delete(key)
    this.#bytes -= held.bytes
    this.#release(held.picture)
  }

  /** Lets go of every tile whose key begins so: a scan that was closed, a display that was changed. */
  clear(prefix = ''): void {
    for (const key of [...this.#held.keys()]) if (key.startsWith(prefix)) this.delete(key)
  }
}
