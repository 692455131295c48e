/**
 * Seeded value noise: smooth random fields that are a function of the coordinate, so that any pixel can be drawn alone.
 * Values are roughly even on [-1, 1] with unit lattice spacing; scale the coordinate to set the length of the pattern.
 */

/** A uniform number on [0, 1) for a lattice point. */
function lattice(ix: number, iy: number, seed: number): number {
  let h = Math.imul(ix, 0x27d4eb2d) ^ Math.imul(iy, 0x165667b1) ^ Math.imul(seed, 0x9e3779b1)
  h = Math.imul(h ^ (h >>> 15), 0x85ebca6b)
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35)
  return ((h ^ (h >>> 16)) >>> 0) / 4294967296
}

const ease = (t: number) => t * t * (3 - 2 * t)

/** Smooth noise along a line. */
export function noise1(x: number, seed: number): number {
  const ix = Math.floor(x)
  const a = lattice(ix, 0, seed)
  const b = lattice(ix + 1, 0, seed)
  return 2 * (a + (b - a) * ease(x - ix)) - 1
}

/** Smooth noise over a plane. */
export function noise2(x: number, y: number, seed: number): number {
  const ix = Math.floor(x)
  const iy = Math.floor(y)
  const u = ease(x - ix)
  const v = ease(y - iy)
  const a = lattice(ix, iy, seed)
  const b = lattice(ix + 1, iy, seed)
  const c = lattice(ix, iy + 1, seed)
  const d = lattice(ix + 1, iy + 1, seed)
  return 2 * (a + (b - a) * u + (c - a) * v + (a - b - c + d) * u * v) - 1
}

/** One value a pixel, without any correlation: the grain of the sensor. Nearly normal, SD 1. */
export function grain(ix: number, iy: number, seed: number): number {
  const sum = lattice(ix, iy, seed) + lattice(ix, iy, seed + 101) + lattice(ix, iy, seed + 202)
  return (sum - 1.5) * 2
}
