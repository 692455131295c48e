import { Fault } from '../check.ts'
import type { FaultCode } from '../check.ts'
import type { Progress } from '../work.ts'
import type { TiffImage } from './tiffImage.ts'

type Samples = Uint8Array | Uint16Array

export type ToDecodeWorker =
  | { kind: 'image'; image: number; layout: TiffImage }
  | { kind: 'block'; job: number; image: number; index: number; packed: Uint8Array }
  | { kind: 'hash'; job: number; file: Blob }
  | { kind: 'stop'; job: number }

export type FromDecodeWorker =
  | { kind: 'progress'; job: number; progress: Progress }
  | { kind: 'done'; job: number; result: Samples | string }
  | { kind: 'failed'; job: number; failure: { code: FaultCode; field: string; value: string; message: string } }

interface Pending {
  resolve: (result: Samples | string) => void
  reject: (error: unknown) => void
  onProgress: ((progress: Progress) => void) | undefined
}

interface Member {
  worker: Worker
  /** Jobs it has not answered yet. */
  pending: Map<number, Pending>
  images: Set<number>
}

/** More than this gains nothing: the disk and the caller's thread are then what is waited for. */
const mostWorkers = 4

/** Workers below the reading worker that unpack blocks and hash files side by side; started when first needed. */
export class DecodePool {
  private readonly members: Member[] = []
  private readonly numbers = new WeakMap<TiffImage, number>()
  private lastImage = 0
  private lastJob = 0

  /** Decodes a block; `packed` is copied, the samples are handed over. */
  decodeBlock(image: TiffImage, index: number, packed: Uint8Array): Promise<Samples> {
    const member = this.idlest()
    const number = this.introduce(member, image)
    return this.run<Samples>(member, (job) => {
      const own = packed.slice()
      member.worker.postMessage({ kind: 'block', job, image: number, index, packed: own } satisfies ToDecodeWorker, [
        own.buffer,
      ])
    })
  }

  /** SHA-256 of a file. */
  hash(file: Blob, onProgress?: (progress: Progress) => void, signal?: AbortSignal): Promise<string> {
    const member = this.idlest()
    const hashing = this.run<string>(
      member,
      (job) => {
        member.worker.postMessage({ kind: 'hash', job, file } satisfies ToDecodeWorker)
        signal?.addEventListener('abort', () => {
          member.worker.postMessage({ kind: 'stop', job } satisfies ToDecodeWorker)
          // The worker says so too, but a cancelled job waits for nobody.
          member.pending.get(job)?.reject(signal.reason)
          member.pending.delete(job)
        })
      },
      onProgress,
    )
    return hashing
  }

  private run<Result extends Samples | string>(
    member: Member,
    send: (job: number) => void,
    onProgress?: (progress: Progress) => void,
  ): Promise<Result> {
    const job = ++this.lastJob
    return new Promise<Result>((resolve, reject) => {
      member.pending.set(job, { resolve: resolve as Pending['resolve'], reject, onProgress })
      send(job)
    })
  }

  /** Tells a worker once how the blocks of an image are packed; where they stand in the file is not its business. */
  private introduce(member: Member, image: TiffImage): number {
    const number = this.numbers.get(image) ?? ++this.lastImage
    this.numbers.set(image, number)
    if (!member.images.has(number)) {
      member.images.add(number)
      const layout = { ...image, offsets: new Float64Array(0), byteCounts: new Float64Array(0) }
      member.worker.postMessage({ kind: 'image', image: number, layout } satisfies ToDecodeWorker)
    }
    return number
  }

  private idlest(): Member {
    const idlest = this.members.reduce<Member | null>(
      (best, member) => (best && best.pending.size <= member.pending.size ? best : member),
      null,
    )
    const most = Math.max(1, Math.min(mostWorkers, navigator.hardwareConcurrency))
    if (idlest && (idlest.pending.size === 0 || this.members.length >= most)) return idlest
    return this.start()
  }

  private start(): Member {
    const worker = new Worker(new URL('./decodeWorker.ts', import.meta.url), { type: 'module' })
    const member: Member = { worker, pending: new Map(), images: new Set() }
    worker.onmessage = ({ data: message }: MessageEvent<FromDecodeWorker>) => receive(member, message)
    worker.onerror = (event) => {
      // It cannot go on: what it was asked for fails, and the next request starts another.
      event.preventDefault()
      this.members.splice(this.members.indexOf(member), 1)
      worker.terminate()
      const fault = new Fault(
        'internal',
        'decoder',
        event.message,
        'a decoding process of the browser ended unexpectedly. Try again; if it happens again, close other pages to free memory.',
      )
      for (const { reject } of member.pending.values()) reject(fault)
    }
    this.members.push(member)
    return member
  }
}

function receive(member: Member, message: FromDecodeWorker): void {
  const pending = member.pending.get(message.job)
  if (!pending) return
  if (message.kind === 'progress') {
    pending.onProgress?.(message.progress)
    return
  }
  member.pending.delete(message.job)
  if (message.kind === 'done') pending.resolve(message.result)
  else {
    const { code, field, value, message: words } = message.failure
    pending.reject(new Fault(code, field, value, words))
  }
}
