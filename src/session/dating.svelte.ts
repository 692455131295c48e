import type { Curve } from '../../worker/core/curve.ts'
import type { CoreDate as DateForAges } from '../../worker/core/dates.ts'
import type { DatingResult } from '../../worker/core/dating.ts'
import type { CountOfSection } from '../../worker/core/layersOfCount.ts'
import type { CountedLayers } from '../../worker/core/countedLayers.ts'
import type { Progress } from '../../worker/work.ts'
import type { CoreDate } from '../document/project.ts'
import { wordsOf } from './scanDesk.svelte.ts'
import { JobCancelled } from './workerClient.ts'
import type { WorkerClient } from './workerClient.ts'

/** What is dated: a count, the dates of the core, and the year of the youngest varve where it is known. */
export interface DatingSubject {
  count: CountOfSection
  dates: readonly CoreDate[]
  topYear: number | null
}

/** Ages of every layer with the dates they rest on. */
export interface DatedCore {
  layers: CountedLayers
  result: DatingResult
  /** The dates that took part, in the order of `result.checks` after the anchor. */
  dates: readonly CoreDate[]
}

/**
 * Exact calendar ages, worked out again after every edit; the old result stays and is marked old until then. Without an
 * anchor and without a date in use the count floats and there is nothing to work out.
 */
export class Dating {
  #client: WorkerClient
  #subject: () => DatingSubject | null
  #wanted = ''
  /** Calibration curves given by the user beside the built-in one; remembered for the visit. */
  curves = $state.raw<readonly Curve[]>([])
  /** SD of the bias that the whole count shares, as a share. */
  biasSd = $state(0.02)
  /** Date left out for a moment, to see what the others say; null: none. */
  leftOut = $state<string | null>(null)
  result = $state.raw<DatedCore | null>(null)
  current = $state(false)
  progress = $state.raw<Progress | null>(null)
  failure = $state('')

  constructor(client: WorkerClient, subject: () => DatingSubject | null) {
    this.#client = client
    this.#subject = subject
  }

  /** Works out the ages if what they rest on has changed. */
  async follow(): Promise<void> {
    const subject = this.#subject()
    const dates = subject?.dates.filter(({ use, id }) => use && id !== this.leftOut) ?? []
    const bare = !subject || (dates.length === 0 && subject.topYear === null) || subject.count.position.length < 2
    const key = bare
      ? ''
      : JSON.stringify([
          [...subject.count.position],
          [...subject.count.probability],
          { ...subject.count, position: 0, probability: 0 },
          dates,
          subject.topYear,
          this.biasSd,
          this.curves.map(({ sha256 }) => sha256),
        ])
    if (key === this.#wanted) return
    this.#wanted = key
    this.failure = ''
    this.current = false
    if (bare) {
      this.#client.cancel('date')
      this.result = null
      this.progress = null
      return
    }
    try {
      const layers = await this.#client.run('layersOfCount', subject.count, { slot: 'layersOfCount' })
      const result = await this.#client.run(
        'date',
        {
          layers,
          dates: dates.map(forAges),
          topYear: subject.topYear,
          curves: this.curves,
          lattice: { biasSd: this.biasSd },
        },
        { slot: 'date', onProgress: (progress) => (this.progress = progress) },
      )
      if (this.#wanted !== key) return
      this.result = { layers, result, dates }
      this.current = true
    } catch (error) {
      if (error instanceof JobCancelled || this.#wanted !== key) return
      this.failure = wordsOf(error)
      this.result = null
    }
    this.progress = null
  }

  cancel(): void {
    this.#client.cancel('date')
    this.progress = null
  }

  /** Takes in a calibration curve from its file. */
  async addCurve(file: File): Promise<Curve> {
    const bytes = await file.arrayBuffer()
    const digest = new Uint8Array(await crypto.subtle.digest('SHA-256', bytes))
    const sha256 = Array.from(digest, (byte) => byte.toString(16).padStart(2, '0')).join('')
    const text = new TextDecoder('utf-8', { fatal: false }).decode(bytes)
    const curve = await this.#client.run('curve', { text, name: file.name, sha256 })
    this.curves = [...this.curves.filter((one) => one.sha256 !== sha256 && one.name !== curve.name), curve]
    return curve
  }

  removeCurve(sha256: string): void {
    this.curves = this.curves.filter((one) => one.sha256 !== sha256)
  }
}

/** A date of the document as the ages take it. */
function forAges({ id, kind, top, base, value, sigma, offset, offsetSigma }: CoreDate): DateForAges {
  return { id, kind, top, base, value, sigma, offset, offsetSigma }
}
