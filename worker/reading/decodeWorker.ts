/// <reference lib="webworker" />
import { Fault } from '../check.ts'
import { browserDecoders } from './browserDecoders.ts'
import { blobSource } from './bytes.ts'
import type { FromDecodeWorker, ToDecodeWorker } from './decodePool.ts'
import { hashSource } from './sha256.ts'
import { decodeBlock } from './tiffBlock.ts'
import type { TiffImage } from './tiffImage.ts'

declare const self: DedicatedWorkerGlobalScope

/** Layouts of the images whose blocks are decoded here, by the number the pool gave them. */
const images = new Map<number, TiffImage>()
const stops = new Map<number, AbortController>()

const post = (message: FromDecodeWorker, transfer: Transferable[] = []) => self.postMessage(message, transfer)

self.onmessage = ({ data: message }: MessageEvent<ToDecodeWorker>) => {
  if (message.kind === 'image') images.set(message.image, message.layout)
  else if (message.kind === 'stop') stops.get(message.job)?.abort()
  else if (message.kind === 'block') void answer(message.job, () => block(message))
  else void answer(message.job, () => hash(message))
}

async function answer(job: number, work: () => Promise<Uint8Array | Uint16Array | string>): Promise<void> {
  try {
    const result = await work()
    post({ kind: 'done', job, result }, typeof result === 'string' ? [] : [result.buffer as ArrayBuffer])
  } catch (error) {
    const { code, field, value, message } =
      error instanceof Fault ? error : new Fault('internal', '', '', String(error))
    post({ kind: 'failed', job, failure: { code, field, value, message } })
  }
}

async function block({ image, index, packed }: ToDecodeWorker & { kind: 'block' }): Promise<Uint8Array | Uint16Array> {
  const samples = await decodeBlock(images.get(image)!, index, packed, browserDecoders)
  // What is handed over must own its memory whole: a view would take a larger buffer along.
  return samples.byteLength === samples.buffer.byteLength ? samples : samples.slice()
}

async function hash({ job, file }: ToDecodeWorker & { kind: 'hash' }): Promise<string> {
  const stop = new AbortController()
  stops.set(job, stop)
  try {
    return await hashSource(blobSource(file), (progress) => post({ kind: 'progress', job, progress }), stop.signal)
  } finally {
    stops.delete(job)
  }
}
