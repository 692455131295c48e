/** Keeps decoded blocks, those used last, up to a number of bytes. What is being decoded is kept as its promise. */
export class BlockCache<Block> {
  private readonly entries = new Map<string, { block: Promise<Block>; bytes: number }>()
  private held = 0
  readonly mostBytes: number

  constructor(mostBytes: number) {
    this.mostBytes = mostBytes
  }

  get(key: string): Promise<Block> | undefined {
    const entry = this.entries.get(key)
    if (!entry) return undefined
    // A map keeps the order of insertion: the entry used last moves to the end.
    this.entries.delete(key)
    this.entries.set(key, entry)
    return entry.block
  }

  set(key: string, block: Promise<Block>, bytes: number): void {
    this.delete(key)
    this.entries.set(key, { block, bytes })
    this.held += bytes
    // A block that could not be decoded is tried again next time; whoever awaits it hears of the failure.
    block.catch(() => {
      if (this.entries.get(key)?.block === block) this.delete(key)
    })
    for (const oldest of this.entries.keys()) {
      if (this.held <= this.mostBytes || oldest === key) break
      this.delete(oldest)
    }
  }

  clear(): void {
    this.entries.clear()
    this.held = 0
  }

  private delete(key: string): void {
    this.held -= this.entries.get(key)?.bytes ?? 0
    this.entries.delete(key)
  }
}
