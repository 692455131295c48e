import type { Progress } from '../work.ts'
import type { ByteSource } from './scanFile.ts'
import { roundConstants } from './sha256Constants.ts'
import { wasmCompressor } from './sha256Wasm.ts'
import type { WasmCompressor } from './sha256Wasm.ts'

/** Bytes hashed between two turns of the event loop: about 15 ms of work. */
const sliceBytes = 4 << 20

/**
 * SHA-256 (FIPS 180-4) fed piece by piece: the platform's own digest wants the whole message in memory at once,
 * which a scan of a gigabyte is too large for.
 */
export class Sha256 {
  private readonly state = Int32Array.from([
    0x6a09e667, 0xbb67ae85, 0x3c6ef372, 0xa54ff53a, 0x510e527f, 0x9b05688c, 0x1f83d9ab, 0x5be0cd19,
  ])
  private readonly schedule = new Int32Array(64)
  private readonly pending = new Uint8Array(64)
  private pendingLength = 0
  private total = 0
  private readonly fast: WasmCompressor | null

  /** Without `fast`, by plain JavaScript, as where WebAssembly is switched off. */
  constructor(fast = true) {
    this.fast = fast ? wasmCompressor() : null
    this.fast?.state.set(this.state)
  }

  update(bytes: Uint8Array): this {
    this.total += bytes.length
    let at = 0
    if (this.pendingLength > 0) {
      at = Math.min(64 - this.pendingLength, bytes.length)
      this.pending.set(bytes.subarray(0, at), this.pendingLength)
      this.pendingLength += at
      if (this.pendingLength < 64) return this
      this.compress(this.pending, 0, 64)
      this.pendingLength = 0
    }
    const whole = at + ((bytes.length - at) & ~63)
    this.compress(bytes, at, whole)
    this.pending.set(bytes.subarray(whole))
    this.pendingLength = bytes.length - whole
    return this
  }

  /** The digest in lower-case hexadecimal. The object must not be fed afterwards. */
  hex(): string {
    const tail = new Uint8Array(this.pendingLength < 56 ? 64 : 128)
    tail.set(this.pending.subarray(0, this.pendingLength))
    tail[this.pendingLength] = 0x80
    const view = new DataView(tail.buffer)
    view.setUint32(tail.length - 8, Math.floor(this.total / 0x20000000))
    view.setUint32(tail.length - 4, (this.total << 3) >>> 0)
    this.compress(tail, 0, tail.length)
    return Array.from(this.fast?.state ?? this.state, (word) => (word >>> 0).toString(16).padStart(8, '0')).join('')
  }

  private compress(bytes: Uint8Array, from: number, to: number): void {
    const { fast } = this
    if (!fast) {
      compress(this.state, this.schedule, bytes, from, to)
      return
    }
    for (let at = from; at < to; at += fast.input.length) {
      const part = bytes.subarray(at, Math.min(to, at + fast.input.length))
      fast.input.set(part)
      fast.compress(part.length)
    }
  }
}

/** SHA-256 of a whole file, read slice by slice; each read gives the event loop a turn. */
export async function hashSource(
  source: ByteSource,
  onProgress?: (progress: Progress) => void,
  signal?: AbortSignal,
): Promise<string> {
  const hash = new Sha256()
  let next = source.read(0, Math.min(sliceBytes, source.size))
  for (let at = 0; at < source.size; at += sliceBytes) {
    signal?.throwIfAborted()
    const bytes = await next
    const after = at + sliceBytes
    // The next slice is on its way from disk while this one is hashed.
    if (after < source.size) next = source.read(after, Math.min(sliceBytes, source.size - after))
    hash.update(bytes)
    onProgress?.({ stage: 'hash', done: Math.min(after, source.size), total: source.size })
  }
  return hash.hex()
}

/**
 * The compression function of FIPS 180-4, section 6.2.2, over the 64-byte blocks of bytes[from, to).
 * Eight rounds stand written out, so that the eight working variables change roles instead of being moved: four times the speed.
 */
function compress(state: Int32Array, w: Int32Array, bytes: Uint8Array, from: number, to: number): void {
  const k = roundConstants
  for (let at = from; at < to; at += 64) {
    expand(w, bytes, at)
    let a = state[0]
    let b = state[1]
    let c = state[2]
    let d = state[3]
    let e = state[4]
    let f = state[5]
    let g = state[6]
    let h = state[7]
    for (let i = 0; i < 64; i += 8) {
      h = (h + (rotate(e, 26) ^ rotate(e, 21) ^ rotate(e, 7)) + (g ^ (e & (f ^ g))) + k[i] + w[i]) | 0
      d = (d + h) | 0
      h = (h + (rotate(a, 30) ^ rotate(a, 19) ^ rotate(a, 10)) + ((a & b) | (c & (a | b)))) | 0
      g = (g + (rotate(d, 26) ^ rotate(d, 21) ^ rotate(d, 7)) + (f ^ (d & (e ^ f))) + k[i + 1] + w[i + 1]) | 0
      c = (c + g) | 0
      g = (g + (rotate(h, 30) ^ rotate(h, 19) ^ rotate(h, 10)) + ((h & a) | (b & (h | a)))) | 0
      f = (f + (rotate(c, 26) ^ rotate(c, 21) ^ rotate(c, 7)) + (e ^ (c & (d ^ e))) + k[i + 2] + w[i + 2]) | 0
      b = (b + f) | 0
      f = (f + (rotate(g, 30) ^ rotate(g, 19) ^ rotate(g, 10)) + ((g & h) | (a & (g | h)))) | 0
      e = (e + (rotate(b, 26) ^ rotate(b, 21) ^ rotate(b, 7)) + (d ^ (b & (c ^ d))) + k[i + 3] + w[i + 3]) | 0
      a = (a + e) | 0
      e = (e + (rotate(f, 30) ^ rotate(f, 19) ^ rotate(f, 10)) + ((f & g) | (h & (f | g)))) | 0
      d = (d + (rotate(a, 26) ^ rotate(a, 21) ^ rotate(a, 7)) + (c ^ (a & (b ^ c))) + k[i + 4] + w[i + 4]) | 0
      h = (h + d) | 0
      d = (d + (rotate(e, 30) ^ rotate(e, 19) ^ rotate(e, 10)) + ((e & f) | (g & (e | f)))) | 0
      c = (c + (rotate(h, 26) ^ rotate(h, 21) ^ rotate(h, 7)) + (b ^ (h & (a ^ b))) + k[i + 5] + w[i + 5]) | 0
      g = (g + c) | 0
      c = (c + (rotate(d, 30) ^ rotate(d, 19) ^ rotate(d, 10)) + ((d & e) | (f & (d | e)))) | 0
      b = (b + (rotate(g, 26) ^ rotate(g, 21) ^ rotate(g, 7)) + (a ^ (g & (h ^ a))) + k[i + 6] + w[i + 6]) | 0
      f = (f + b) | 0
      b = (b + (rotate(c, 30) ^ rotate(c, 19) ^ rotate(c, 10)) + ((c & d) | (e & (c | d)))) | 0
      a = (a + (rotate(f, 26) ^ rotate(f, 21) ^ rotate(f, 7)) + (h ^ (f & (g ^ h))) + k[i + 7] + w[i + 7]) | 0
      e = (e + a) | 0
      a = (a + (rotate(b, 30) ^ rotate(b, 19) ^ rotate(b, 10)) + ((b & c) | (d & (b | c)))) | 0
    }
    state[0] += a
    state[1] += b
    state[2] += c
    state[3] += d
    state[4] += e
    state[5] += f
    state[6] += g
    state[7] += h
  }
}

/** The message schedule of one block: 64 words. */
function expand(w: Int32Array, bytes: Uint8Array, at: number): void {
  for (let i = 0, p = at; i < 16; i++, p += 4) {
    w[i] = (bytes[p] << 24) | (bytes[p + 1] << 16) | (bytes[p + 2] << 8) | bytes[p + 3]
  }
  for (let i = 16; i < 64; i++) {
    const x = w[i - 15]
    const y = w[i - 2]
    const s0 = rotate(x, 25) ^ rotate(x, 14) ^ (x >>> 3)
    const s1 = rotate(y, 15) ^ rotate(y, 13) ^ (y >>> 10)
    w[i] = (w[i - 16] + s0 + w[i - 7] + s1) | 0
  }
}

function rotate(word: number, left: number): number {
  return (word << left) | (word >>> (32 - left))
}
