import { damaged } from './tiffDirectory.ts'
import { tooShort } from './lzw.ts'

/** Unpacked bytes of a zlib stream (RFC 1950), in pieces as the platform's decompressor yields them. */
export async function* inflatePieces(packed: ReadableStream<Uint8Array<ArrayBuffer>>): AsyncGenerator<Uint8Array> {
  const reader = packed.pipeThrough(new DecompressionStream('deflate')).getReader()
  try {
    for (;;) {
      const { done, value } = await reader.read()
      if (done) return
      yield value
    }
  } finally {
    // A consumer that has enough leaves early; what the stream makes of that is of no interest.
    reader.cancel().catch(() => undefined)
  }
}

/** One whole strip or tile of a known unpacked length. */
export async function unpackDeflate(packed: Uint8Array, length: number): Promise<Uint8Array> {
  const output = new Uint8Array(length)
  let filled = 0
  try {
    for await (const piece of inflatePieces(new Blob([packed as Uint8Array<ArrayBuffer>]).stream())) {
      const part = piece.subarray(0, length - filled)
      output.set(part, filled)
      filled += part.length
      // Some writers leave bytes after the end of the stream, which the platform takes for an error.
      if (filled === length && piece.length > part.length) break
    }
  } catch {
    if (filled === length && endsWithChecksum(packed, output)) return output
    throw damaged('Deflate data', filled, `breaks off or is garbled after ${filled} of ${length} bytes`)
  }
  if (filled < length) throw tooShort('Deflate', filled, length)
  return output
}

/** Whether the Adler-32 of the output (RFC 1950, 2.2) stands in the packed bytes, with a little padding after it. */
function endsWithChecksum(packed: Uint8Array, output: Uint8Array): boolean {
  const sum = adler32(output)
  const view = new DataView(packed.buffer, packed.byteOffset, packed.byteLength)
  for (let at = packed.length - 4; at >= 0 && at >= packed.length - 68; at--) {
    if (view.getUint32(at) === sum) return true
  }
  return false
}

function adler32(bytes: Uint8Array): number {
  let a = 1
  let b = 0
  for (let at = 0; at < bytes.length;) {
    const end = Math.min(at + 3800, bytes.length)
    for (; at < end; at++) {
      a += bytes[at]
      b += a
    }
    a %= 65521
    b %= 65521
  }
  return ((b << 16) | a) >>> 0
}
