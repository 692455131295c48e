import { deflateSync } from 'node:zlib'
import { describe, expect, test } from 'vitest'
import { seededRandom } from '../../../worker/random.ts'
import { unpackDeflate } from '../../../worker/reading/inflate.ts'
import { longestLzwString, LzwDecoder, unpackLzw } from '../../../worker/reading/lzw.ts'
import { PackBitsDecoder, unpackPackBits } from '../../../worker/reading/packBits.ts'
import { packBits, packLzw } from '../../fixtures/packStrip.ts'

/** Bytes with runs, repeats and noise: `kinds` different values. */
function drawBytes(seed: number, length: number, kinds: number): Uint8Array {
  const random = seededRandom(seed)
  const bytes = new Uint8Array(length)
  for (let at = 0; at < length;) {
    const run = random.below(3) === 0 ? 1 + random.below(200) : 1
    bytes.fill(random.below(kinds), at, at + run)
    at += run
  }
  return bytes
}

const cases = [1, 2, 3, 4, 5, 6].map((seed) => ({
  seed,
  bytes: drawBytes(seed, 9000 + seed * 1717, [2, 5, 17, 90, 200, 256][seed - 1]),
}))

describe('LZW', () => {
  test.each(cases)('gives back what was packed (seed $seed)', ({ bytes }) => {
    expect(unpackLzw(packLzw(bytes), bytes.length)).toEqual(bytes)
    expect(unpackLzw(packLzw(bytes, false), bytes.length), 'with a table that is never cleared').toEqual(bytes)
  })

  test('copies strings that overlap what they write', () => {
    const bytes = new Uint8Array(5000).fill(9)
    expect(unpackLzw(packLzw(bytes), 5000)).toEqual(bytes)
  })

  test.each(cases)('does not depend on how input and output are cut (seed $seed)', ({ seed, bytes }) => {
    for (const packed of [packLzw(bytes), packLzw(bytes, false)]) {
      const random = seededRandom(seed)
      const decoder = new LzwDecoder(new Uint8Array(700 + longestLzwString))
      const taken: Uint8Array[] = []
      let left = bytes.length
      for (let at = 0; left > 0;) {
        const end = Math.min(packed.length, at + 1 + random.below(300))
        while (at < end || decoder.filled - decoder.taken >= Math.min(700, left)) {
          at = decoder.decode(packed, at, end, Math.min(700, left))
          if (decoder.filled - decoder.taken < Math.min(700, left)) break
          const count = Math.min(700, left)
          taken.push(decoder.take(count, 700))
          left -= count
          if (left === 0) break
        }
      }
      expect(Buffer.concat(taken).equals(bytes), `seed ${seed}`).toBe(true)
    }
  })

  test('keeps no more than its table refers to', () => {
    const bytes = drawBytes(11, 150_000, 200)
    const packed = packLzw(bytes, false)
    const decoder = new LzwDecoder(new Uint8Array(1000 + longestLzwString))
    for (let at = 0, band = 0; band < 149; band++) {
      at = decoder.decode(packed, at, packed.length, 1000)
      decoder.take(1000, 1000)
    }
    expect(decoder.output.length).toBeLessThan(100_000)
  })

  test('refuses codes that do not exist yet, and input that is too short', () => {
    const packed = packLzw(Uint8Array.of(1, 2, 3, 4))
    expect(() => unpackLzw(packed, 5)).toThrow('LZW data unpacks to 4 bytes where 5 are needed')
    // Clear, then code 300.
    const early = Uint8Array.of(0x80, 0x4b, 0, 0)
    expect(() => unpackLzw(early, 5)).toThrow('LZW data names code 300 before it exists')
    expect(() => unpackLzw(Uint8Array.of(0, 1, 2, 3), 5)).toThrow('is in the reversed bit order of TIFF 5 and older')
  })
})

describe('PackBits', () => {
  test.each(cases)('gives back what was packed (seed $seed)', ({ bytes }) => {
    expect(unpackPackBits(packBits(bytes, 300), bytes.length)).toEqual(bytes)
  })

  test.each(cases)('does not depend on how input and output are cut (seed $seed)', ({ seed, bytes }) => {
    const packed = packBits(bytes, 300)
    const random = seededRandom(seed)
    const decoder = new PackBitsDecoder(new Uint8Array(bytes.length))
    for (let at = 0; decoder.filled < bytes.length;) {
      const limit = Math.min(bytes.length, decoder.filled + 1 + random.below(50))
      at = decoder.decode(packed, at, Math.min(packed.length, at + 1 + random.below(50)), limit)
    }
    expect(decoder.output).toEqual(bytes)
  })

  test('refuses input that is too short', () => {
    expect(() => unpackPackBits(Uint8Array.of(3, 1, 2), 4)).toThrow(
      'PackBits data unpacks to 2 bytes where 4 are needed',
    )
  })
})

describe('Deflate', () => {
  const { bytes } = cases[3]
  const packed = new Uint8Array(deflateSync(bytes))

  test('gives back what was packed, however much follows it', async () => {
    expect(await unpackDeflate(packed, bytes.length)).toEqual(bytes)
    const padded = new Uint8Array(packed.length + 3)
    padded.set(packed)
    expect(await unpackDeflate(padded, bytes.length)).toEqual(bytes)
    expect(await unpackDeflate(packed, 100), 'the first bytes only').toEqual(bytes.subarray(0, 100))
  })

  test('refuses a wrong checksum, a broken stream and one that is too short', async () => {
    const wrongSum = packed.slice()
    wrongSum[packed.length - 2] ^= 1
    await expect(unpackDeflate(wrongSum, bytes.length)).rejects.toThrow('Deflate data breaks off or is garbled after')
    await expect(unpackDeflate(packed.subarray(0, packed.length - 50), bytes.length)).rejects.toThrow(
      'Deflate data breaks off or is garbled after',
    )
    await expect(unpackDeflate(packed, bytes.length + 1)).rejects.toThrow(
      `Deflate data unpacks to ${bytes.length} bytes where ${bytes.length + 1} are needed`,
    )
  })
})
