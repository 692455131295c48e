import type { Display } from '../../worker/core/display.ts'
import type { ScanInfo } from '../../worker/reading/scanFile.ts'
import type { Progress } from '../../worker/work.ts'
import { JobCancelled } from './workerClient.ts'
import type { WorkerClient } from './workerClient.ts'

export interface OpenScan {
  info: ScanInfo
  display: Display
}

/** Where scan files are kept between visits; see scanStore.ts. */
export interface ScanKeeper {
  keep(sha256: string, file: Blob, name: string): Promise<void>
  find(sha256: string): Promise<{ file: Blob; name: string } | null>
}

/** The scans that lie open on the desk: their facts and how each is shown, by SHA-256. */
export class ScanDesk {
  #client: WorkerClient
  #keeper: ScanKeeper
  open = $state.raw<ReadonlyMap<string, OpenScan>>(new Map())
  /** The file being opened, with its progress. */
  opening = $state.raw<{ name: string; progress: Progress | null } | null>(null)

  constructor(client: WorkerClient, keeper: ScanKeeper) {
    this.#client = client
    this.#keeper = keeper
  }

  get(sha256: string | undefined): OpenScan | null {
    return sha256 === undefined ? null : (this.open.get(sha256) ?? null)
  }

  /** Opens a file, hashing it and reading its facts; rejects with JobFailure in the reader's words. */
  async read(file: Blob, name: string): Promise<OpenScan> {
    this.opening = { name, progress: null }
    try {
      const info = await this.#client.run(
        'openScan',
        { file, name },
        {
          slot: 'openScan',
          onProgress: (progress) => (this.opening = { name, progress }),
        },
      )
      const display = await this.#client.run('stretch', { scan: info.sha256 })
      // Photographs are shown as scanned; 16-bit scans use a sliver of their range and would be black or flat grey.
      const asScanned: Display = { black: 0, white: 255, gamma: 1, channel: 'colour' }
      const scan = { info, display: info.bits === 16 ? display : asScanned }
      this.open = new Map(this.open).set(info.sha256, scan)
      return scan
    } finally {
      this.opening = null
    }
  }

  /** Reads a new file and keeps a copy for the next visit; the reason why none could be kept is handed to `warn`. */
  async bringIn(file: Blob, name: string, warn: (words: string) => void): Promise<OpenScan> {
    const scan = await this.read(file, name)
    try {
      await this.#keeper.keep(scan.info.sha256, file, name)
    } catch (error) {
      warn(
        `${name} is open, but the browser could not keep a copy (${wordsOf(error)}). You will be asked for the file when you come back.`,
      )
    }
    return scan
  }

  /** Opens a scan of the project from the copy kept at an earlier visit; null when there is none. */
  async recall(sha256: string): Promise<OpenScan | null> {
    const already = this.open.get(sha256)
    if (already) return already
    try {
      const kept = await this.#keeper.find(sha256)
      return kept ? await this.read(kept.file, kept.name) : null
    } catch (error) {
      if (error instanceof JobCancelled) return null
      throw error
    }
  }

  /** The copy kept of a scan, for a project file that carries its scans. */
  async fileOf(sha256: string): Promise<{ file: Blob; name: string } | null> {
    return this.#keeper.find(sha256)
  }

  cancelOpening(): void {
    this.#client.cancel('openScan')
  }

  show(sha256: string, display: Display): void {
    const scan = this.open.get(sha256)
    if (scan) this.open = new Map(this.open).set(sha256, { ...scan, display })
  }

  /** The display that fills the screen's range with the scan's own values. */
  stretched(sha256: string): Promise<Display> {
    return this.#client.run('stretch', { scan: sha256 })
  }
}

export function wordsOf(error: unknown): string {
  return error instanceof Error ? error.message : String(error)
}
