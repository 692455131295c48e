import { protocolVersion } from '../../worker/protocol.ts'
import type { Failure, FromWorker, JobKind, Reply, Request, ToWorker } from '../../worker/protocol.ts'
import type { Progress } from '../../worker/work.ts'

/** A job that failed, in the worker's words. */
export class JobFailure extends Error {
  readonly failure: Failure
  constructor(failure: Failure) {
    super(failure.message)
    this.name = 'JobFailure'
    this.failure = failure
  }
}

/** A job that was cancelled, or overtaken by a newer one in its slot. */
export class JobCancelled extends Error {
  constructor() {
    super('cancelled')
    this.name = 'JobCancelled'
  }
}

export interface RunOptions {
  /** A newer job in the same slot cancels the older one. */
  slot?: string
  onProgress?: (progress: Progress) => void
}

/** The part of a Worker that the client uses; a test may stand in for it. */
export interface Port {
  postMessage(message: ToWorker): void
  terminate(): void
  onmessage: ((event: { data: FromWorker }) => void) | null
  onerror: ((event: { message?: string; preventDefault?: () => void }) => void) | null
}

interface Outstanding {
  slot: string | undefined
  settle: (final: FromWorker | Error) => void
  onProgress: ((progress: Progress) => void) | undefined
}

/**
 * Sends jobs to the worker and hands back their replies. A crash of the worker rejects everything outstanding and
 * starts a new one; scans that were open are opened again there before the next job runs.
 */
export class WorkerClient {
  #start: () => Port
  #port: Port
  #next = 1
  #outstanding = new Map<number, Outstanding>()
  #files = new Map<string, { file: Blob; name: string }>()
  /** Resolves when the scans of a restarted worker are open again. */
  #restored: Promise<unknown> = Promise.resolve()
  #onCrash: (words: string) => void

  constructor(start: () => Port, onCrash: (words: string) => void = () => undefined) {
    this.#start = start
    this.#onCrash = onCrash
    this.#port = this.#connect()
  }

  /** Runs one job. Rejects with JobFailure or JobCancelled. */
  async run<K extends JobKind>(kind: K, request: Request<K>, options: RunOptions = {}): Promise<Reply<K>> {
    if (options.slot) this.cancel(options.slot)
    const restored = this.#restored
    const ticket = this.#reserve(options)
    await restored
    const reply = await this.#send(ticket, kind, request)
    if (kind === 'openScan') {
      const opened = request as Request<'openScan'>
      this.#files.set((reply as Reply<'openScan'>).sha256, opened)
    }
    if (kind === 'closeScan') this.#files.delete((request as Request<'closeScan'>).scan)
    return reply
  }

  /** Cancels what runs in a slot; its promise rejects with JobCancelled at once. */
  cancel(slot: string): void {
    for (const [job, outstanding] of this.#outstanding) {
      if (outstanding.slot !== slot) continue
      this.#port.postMessage({ type: 'cancel', job })
      this.#outstanding.delete(job)
      outstanding.settle(new JobCancelled())
    }
  }

  close(): void {
    this.#port.onerror = null
    this.#port.terminate()
    this.#rejectAll('the worker was closed')
  }

  #reserve(options: RunOptions): { job: number; result: Promise<FromWorker> } {
    const job = this.#next++
    const result = new Promise<FromWorker>((resolve, reject) => {
      const settle = (final: FromWorker | Error) => {
        if (final instanceof Error) reject(final)
        else resolve(final)
      }
      this.#outstanding.set(job, { slot: options.slot, settle, onProgress: options.onProgress })
    })
    // A reservation may be cancelled before anyone awaits it; that is no unhandled rejection.
    result.catch(() => undefined)
    return { job, result }
  }

  async #send<K extends JobKind>(
    { job, result }: { job: number; result: Promise<FromWorker> },
    kind: K,
    request: Request<K>,
  ): Promise<Reply<K>> {
    if (this.#outstanding.has(job)) this.#port.postMessage({ type: 'run', job, kind, request })
    const final = await result
    if (final.type === 'done') return final.reply
    if (final.type === 'failed') throw new JobFailure(final.failure)
    throw new JobCancelled()
  }

  #connect(): Port {
    const port = this.#start()
    port.onmessage = ({ data }) => this.#receive(data)
    port.onerror = (event) => {
      event.preventDefault?.()
      this.#recover(event.message ?? 'unknown reason')
    }
    return port
  }

  #receive(message: FromWorker): void {
    if (message.type === 'ready') {
      if (message.protocol !== protocolVersion) {
        this.#onCrash('the page and its worker are of different versions; reload the page')
      }
      return
    }
    const outstanding = this.#outstanding.get(message.job)
    if (!outstanding) return
    if (message.type === 'progress') {
      outstanding.onProgress?.(message.progress)
      return
    }
    this.#outstanding.delete(message.job)
    outstanding.settle(message)
  }

  #recover(words: string): void {
    this.#port.terminate()
    this.#rejectAll(`the worker stopped (${words}) and was started again; nothing you marked is lost`)
    this.#port = this.#connect()
    const files = [...this.#files.values()]
    this.#restored = Promise.allSettled(files.map((opened) => this.#send(this.#reserve({}), 'openScan', opened)))
    this.#onCrash(words)
  }

  #rejectAll(words: string): void {
    const outstanding = [...this.#outstanding.values()]
    this.#outstanding.clear()
    for (const { settle } of outstanding) {
      settle(new JobFailure({ code: 'internal', field: 'worker', value: '', message: words }))
    }
  }
}

/** The page's own worker. */
export function startWorker(): Port {
  return new Worker(new URL('../../worker/worker.ts', import.meta.url), {
    type: 'module',
    name: 'winterclay',
  }) as unknown as Port
}
