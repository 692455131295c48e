import { tooShort } from './lzw.ts'

/** PackBits (TIFF 6.0, section 9): n >= 0: n + 1 bytes follow; n < 0: the next byte 1 - n times; -128: nothing. */
export class PackBitsDecoder {
  output: Uint8Array
  filled = 0
  private literal = 0
  private repeats = 0

  constructor(output: Uint8Array) {
    this.output = output
  }

  /** Decodes input[from, to) until the output holds `limit` bytes or the input ends; returns where the input stands. */
  decode(input: Uint8Array, from: number, to: number, limit: number): number {
    const { output } = this
    let { filled } = this
    let at = from
    while (filled < limit && at < to) {
      if (this.literal > 0) {
        const count = Math.min(this.literal, limit - filled, to - at)
        output.set(input.subarray(at, at + count), filled)
        this.literal -= count
        at += count
        filled += count
      } else if (this.repeats > 0) {
        const count = Math.min(this.repeats, limit - filled)
        output.fill(input[at], filled, filled + count)
        this.repeats -= count
        filled += count
        if (this.repeats === 0) at++
      } else {
        const header = input[at++]
        if (header < 128) this.literal = header + 1
        else if (header > 128) this.repeats = 257 - header
      }
    }
    this.filled = filled
    return at
  }
}

/** One whole strip or tile of a known unpacked length. */
export function unpackPackBits(packed: Uint8Array, length: number): Uint8Array {
  const decoder = new PackBitsDecoder(new Uint8Array(length))
  decoder.decode(packed, 0, packed.length, length)
  if (decoder.filled < length) throw tooShort('PackBits', decoder.filled, length)
  return decoder.output
}
