import { createHash } from 'node:crypto'
import { describe, expect, test } from 'vitest'
import { seededRandom } from '../../../worker/random.ts'
import { memorySource } from '../../../worker/reading/bytes.ts'
import { hashSource, Sha256 } from '../../../worker/reading/sha256.ts'

const seed = 20260711

function randomBytes(length: number): Uint8Array {
  const random = seededRandom(seed + length)
  return Uint8Array.from({ length }, () => random.below(256))
}

const nodeHash = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex')

describe.each([true, false])('SHA-256 (as WebAssembly: %s)', (fast) => {
  test('gives the published digests of FIPS 180-4 examples', () => {
    // Examples of NIST's "SHA256.pdf" (from memory); node:crypto below confirms the function on other lengths.
    const text = (words: string) => new TextEncoder().encode(words)
    expect(new Sha256(fast).update(text('abc')).hex()).toBe(
      'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad',
    )
    expect(new Sha256(fast).update(text('abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq')).hex()).toBe(
      '248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1',
    )
  })

  test('agrees with node:crypto for every length around the block borders', () => {
    for (let length = 0; length <= 200; length++) {
      const bytes = randomBytes(length)
      expect(new Sha256(fast).update(bytes).hex(), `length ${length}, seed ${seed}`).toBe(nodeHash(bytes))
    }
  })

  test('hashes more than WebAssembly takes at once', () => {
    const bytes = new Uint8Array(200_001).map((_, i) => (i * 31) & 255)
    expect(new Sha256(fast).update(bytes).hex()).toBe(nodeHash(bytes))
  })

  test('does not depend on how the message is cut', () => {
    const bytes = randomBytes(5000)
    const random = seededRandom(seed)
    for (let run = 0; run < 50; run++) {
      const hash = new Sha256(fast)
      for (let at = 0; at < bytes.length;) {
        const length = random.below(200)
        hash.update(bytes.subarray(at, at + length))
        at += length
      }
      expect(hash.hex(), `run ${run}, seed ${seed}`).toBe(nodeHash(bytes))
    }
  })
})

describe('the hash of a file', () => {
  test('hashes a source of several slices and reports how far it came', async () => {
    const bytes = new Uint8Array((9 << 20) + 17).map((_, i) => (i * 31) & 255)
    const done: number[] = []
    expect(await hashSource(memorySource(bytes), (progress) => done.push(progress.done))).toBe(nodeHash(bytes))
    expect(done).toEqual([4 << 20, 8 << 20, bytes.length])
  })

  test('stops when it is told to', async () => {
    const stop = new AbortController()
    const source = memorySource(new Uint8Array(12 << 20))
    const hashing = hashSource(source, () => stop.abort(new Error('cancelled')), stop.signal)
    await expect(hashing).rejects.toThrow('cancelled')
  })
})
