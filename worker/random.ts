/**
 * Seeded random numbers: the same seed gives the same numbers on every machine.
 * Generator: xoshiro128** (Blackman & Vigna 2021, ACM TOMS 47(4), 36), seeded by SplitMix32.
 */
export interface Random {
  /** Uniform on [0, 1) with 32 bits. */
  uniform(): number
  /** Standard normal (Marsaglia & Bray 1964, polar method). */
  normal(): number
  /** Whole number on [0, bound). */
  below(bound: number): number
}

export function seededRandom(seed: number): Random {
  let mix = seed >>> 0
  const splitMix = () => {
    mix = (mix + 0x9e3779b9) >>> 0
    let z = mix
    z = Math.imul(z ^ (z >>> 16), 0x85ebca6b)
    z = Math.imul(z ^ (z >>> 13), 0xc2b2ae35)
    return (z ^ (z >>> 16)) >>> 0
  }
  let a = splitMix()
  let b = splitMix()
  let c = splitMix()
  let d = splitMix()
  let spare = NaN
  const rotate = (x: number, k: number) => (x << k) | (x >>> (32 - k))

  function next(): number {
    const result = Math.imul(rotate(Math.imul(b, 5), 7), 9) >>> 0
    const t = b << 9
    c ^= a
    d ^= b
    b ^= c
    a ^= d
    c ^= t
    d = rotate(d, 11)
    return result
  }
  function uniform(): number {
    return next() / 4294967296
  }
  function normal(): number {
    if (!Number.isNaN(spare)) {
      const value = spare
      spare = NaN
      return value
    }
    for (;;) {
      const u = 2 * uniform() - 1
      const v = 2 * uniform() - 1
      const s = u * u + v * v
      if (s > 0 && s < 1) {
        const scale = Math.sqrt((-2 * Math.log(s)) / s)
        spare = v * scale
        return u * scale
      }
    }
  }
  return { uniform, normal, below: (bound) => Math.floor(uniform() * bound) }
}
