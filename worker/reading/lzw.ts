import { damaged } from './tiffDirectory.ts'

const clearCode = 256
const endCode = 257
const mostCodes = 4096
/** No string of the table is longer; an output buffer needs this much room behind its limit. */
export const longestLzwString = mostCodes

/**
 * LZW as in TIFF 6.0, section 13: codes of 9 to 12 bits, most significant bit first, widened one code early.
 *
 * A string of the table is the string before it and one byte more, and both were just written: each is therefore kept as a
 * place in the output and a length, and decoding is copying. The decoder stops when input or output run out and goes on
 * from there, so that a strip of a gigabyte passes through a small buffer.
 */
export class LzwDecoder {
  /** Bytes decoded and not yet taken: output[taken, filled). Before them stands what strings still refer to. */
  output: Uint8Array
  taken = 0
  filled = 0
  finished = false
  // One entry more than there are codes: a full table goes on writing into it.
  private readonly starts = new Int32Array(mostCodes + 1)
  private readonly lengths = new Int32Array(mostCodes + 1)
  /** The entry to be made next; after a clear the first one falls on the end code, which no string can bear. */
  private next = endCode
  private width = 9
  private buffer = 0
  private bits = 0
  private previousStart = 0
  private previousLength = 0
  /** Where the strings of the table begin in the output, and, once the table is full, where they end. */
  private historyStart = 0
  private historyEnd = Infinity

  constructor(output: Uint8Array) {
    this.output = output
  }

  /** Decodes input[from, to) until `count` bytes wait to be taken or the input ends; returns where the input stands. */
  decode(input: Uint8Array, from: number, to: number, count: number): number {
    const { output, starts, lengths } = this
    const limit = this.taken + count
    let { filled, next, width, buffer, bits, previousStart, previousLength } = this
    let mask = (1 << width) - 1
    let at = from
    while (filled < limit) {
      if (bits < width && at + 1 < to) {
        buffer = (buffer << 16) | (input[at] << 8) | input[at + 1]
        at += 2
        bits += 16
      } else if (bits < width && at < to) {
        buffer = (buffer << 8) | input[at++]
        bits += 8
        // One byte may not be enough: look again.
        continue
      } else if (bits < width) break
      bits -= width
      const code = (buffer >>> bits) & mask
      if (code === clearCode) {
        next = endCode
        width = 9
        mask = 511
        this.historyStart = filled
        this.historyEnd = Infinity
        continue
      }
      if (code === endCode) {
        this.finished = true
        break
      }
      // The string before this one and its own first byte, which stands right behind it.
      starts[next] = previousStart
      lengths[next] = previousLength + 1
      if (next < mostCodes && ++next === mostCodes) this.historyEnd = previousStart + previousLength + 1
      if (next === mask && width < 12) mask = (1 << ++width) - 1
      previousStart = filled
      if (code < clearCode) {
        previousLength = 1
        output[filled++] = code
        continue
      }
      if (code >= next) throw damaged('LZW data', code, `names code ${code} before it exists`)
      let source = starts[code]
      previousLength = lengths[code]
      const end = filled + previousLength
      if (previousLength > 32 && source + previousLength <= filled) {
        output.copyWithin(filled, source, source + previousLength)
        filled = end
      } else {
        while (filled < end) output[filled++] = output[source++]
      }
    }
    Object.assign(this, { filled, next, width, buffer, bits, previousStart, previousLength })
    return at
  }

  /** Hands over `count` decoded bytes and goes on in a new output with room for `next` more. */
  take(count: number, next: number): Uint8Array {
    const end = this.taken + count
    const bytes = this.output.subarray(this.taken, end)
    const from = this.historyStart
    // Bytes behind the last string of a full table are not referred to; without this a table never cleared keeps them all.
    const to = Math.min(this.historyEnd, end)
    const output = new Uint8Array(to - from + this.filled - end + next + longestLzwString)
    output.set(this.output.subarray(from, to))
    output.set(this.output.subarray(end, this.filled), to - from)
    for (let code = endCode + 1; code < this.next; code++) this.starts[code] -= from
    this.historyStart = 0
    this.historyEnd -= from
    this.previousStart -= from
    this.taken = to - from
    this.filled = to - from + this.filled - end
    this.output = output
    return bytes
  }
}

/** One whole strip or tile of a known unpacked length. */
export function unpackLzw(packed: Uint8Array, length: number): Uint8Array {
  if (packed[0] === 0 && (packed[1] & 1) === 1) {
    throw damaged('LZW data', packed[0], 'is in the reversed bit order of TIFF 5 and older, which is not read')
  }
  const decoder = new LzwDecoder(new Uint8Array(length + longestLzwString))
  decoder.decode(packed, 0, packed.length, length)
  if (decoder.filled < length) throw tooShort('LZW', decoder.filled, length)
  return decoder.output.subarray(0, length)
}

export function tooShort(compression: string, unpacked: number, expected: number) {
  return damaged(`${compression} data`, unpacked, `unpacks to ${unpacked} bytes where ${expected} are needed`)
}
