/**
 * How strongly a profile repeats itself at each of a row of distances, around each of a row of stations along it:
 * strength[lag * stations + station]. Stations divide the rows evenly.
 */
export interface Periodicity {
  /** Distances, rows, a constant ratio apart: [lags]. */
  lags: Float64Array
  stations: number
  strength: Float64Array
}

/** Lags looked at in each octave. */
export const lagsPerOctave = 8
/** Profiles are averaged in blocks until a lag is this many blocks long: enough for its shape, and longer lags cost less. */
const blocksPerLag = 16
/** Correlations are taken over windows of so many lags. */
const lagsPerWindow = 16
/** Width of the smoother before the correlation, as a share of the lag. */
const smoothingShare = 0.08
/** Half widths of the two moving means, one after the other, that make up the trend, in lags. */
const trendHalves = [1, 0.5] as const
/** Values are cut off at so many mean deviations, so that an event bed or a dropstone does not outweigh the years around it. */
const cutOff = 2.5
/** A window of few lags may correlate by chance: its strength is taken by n / (n + this). */
const doubtfulLags = 4

/**
 * Strength of a lag L: correlation of the profile with itself shifted by L, less that shifted by L / 2, after removing what is
 * slower than about two lags and smoothing what is finer than a twelfth of it. Layers of a thickness L repeat at L and oppose
 * themselves half way; at 2 L the half way repeats too, and at L / 2 nothing does, so that multiples and parts of the
 * thickness fall behind. Treating every lag alike keeps noise, rough or fine, from preferring any of them.
 */
export function* periodicityOf(
  column: Float64Array,
  shortest: number,
  longest: number,
): Generator<number, Periodicity> {
  const count = Math.max(1, Math.floor(lagsPerOctave * Math.log2(longest / shortest)) + 1)
  const lags = Float64Array.from({ length: count }, (_, l) => shortest * 2 ** (l / lagsPerOctave))
  const stations = Math.max(2, Math.min(1024, Math.ceil(column.length / (8 * shortest))))
  const strength = new Float64Array(count * stations)
  let blocks = blockMeans(column, 1)
  for (let l = 0; l < count; l++) {
    const size = Math.max(1, Math.floor(lags[l] / blocksPerLag))
    if (size !== blocks.size) blocks = blockMeans(column, size)
    strength.set(strengthOf(blocks, lags[l] / size, stations, column.length), l * stations)
    yield (l + 1) / count
  }
  return { lags, stations, strength }
}

/** A profile in blocks of `size` rows; columns [blocks]. */
interface Blocks {
  size: number
  /** Mean of a block; 0 in gaps. */
  mean: Float64Array
  readable: Uint8Array
  /** Readable blocks before each: [blocks + 1]. */
  readableBefore: Float64Array
}

function blockMeans(column: Float64Array, size: number): Blocks {
  const count = Math.max(1, Math.floor(column.length / size))
  const blocks: Blocks = {
    size,
    mean: new Float64Array(count),
    readable: new Uint8Array(count),
    readableBefore: new Float64Array(count + 1),
  }
  for (let block = 0; block < count; block++) {
    let sum = 0
    let rows = 0
    for (let row = block * size; row < (block + 1) * size; row++) {
      if (Number.isNaN(column[row])) continue
      sum += column[row]
      rows++
    }
    // A block of which half is missing would be a guess.
    if (2 * rows >= size && rows > 0) {
      blocks.mean[block] = sum / rows
      blocks.readable[block] = 1
    }
    blocks.readableBefore[block + 1] = blocks.readableBefore[block] + blocks.readable[block]
  }
  return blocks
}

/** Running sums between block borders, read anywhere by straight lines. */
function sumUpTo(sums: Float64Array, place: number): number {
  if (place <= 0) return 0
  const whole = Math.floor(place)
  if (whole >= sums.length - 1) return sums[sums.length - 1]
  return sums[whole] + (place - whole) * (sums[whole + 1] - sums[whole])
}

/** Moving mean of the readable blocks over `half` blocks, also parts of them, to either side; 0 in gaps. */
function boxMean(values: Float64Array, { readable, readableBefore }: Blocks, half: number): Float64Array {
  const sums = new Float64Array(values.length + 1)
  for (let i = 0; i < values.length; i++) sums[i + 1] = sums[i] + values[i]
  const mean = new Float64Array(values.length)
  // Away from the ends both borders of every window cut their blocks in the same proportion.
  const before = Math.floor(0.5 - half)
  const beforeShare = 0.5 - half - before
  const after = Math.floor(0.5 + half)
  const afterShare = 0.5 + half - after
  const between = (column: Float64Array, i: number) => {
    const from = i + before
    const to = i + after
    if (from < 0 || to >= values.length) return sumUpTo(column, i + 0.5 + half) - sumUpTo(column, i + 0.5 - half)
    const upTo = column[to] + afterShare * (column[to + 1] - column[to])
    return upTo - (column[from] + beforeShare * (column[from + 1] - column[from]))
  }
  for (let i = 0; i < values.length; i++) {
    if (readable[i] === 1) mean[i] = between(sums, i) / between(readableBefore, i)
  }
  return mean
}

/** The profile around a lag of so many blocks: smoothed, without its trend and cut off; 0 in gaps. */
function bandAround(blocks: Blocks, lag: number): Float64Array {
  const band = boxMean(blocks.mean, blocks, Math.max(0.5, (smoothingShare * lag) / 2))
  const first = boxMean(blocks.mean, blocks, trendHalves[0] * lag)
  const trend = boxMean(first, blocks, trendHalves[1] * lag)
  for (let i = 0; i < band.length; i++) band[i] -= trend[i]
  const deviation = boxMean(band.map(Math.abs), blocks, (lagsPerWindow * lag) / 2)
  for (let i = 0; i < band.length; i++) {
    const most = cutOff * deviation[i]
    band[i] = Math.max(-most, Math.min(most, band[i]))
  }
  return band
}

/** Strength of one lag, in blocks, at each station. */
function strengthOf(blocks: Blocks, lag: number, stations: number, rows: number): Float64Array {
  const band = bandAround(blocks, lag)
  const energy = new Float64Array(stations + 1)
  const contrast = new Float64Array(stations + 1)
  const whole = Math.floor(lag)
  const share = lag - whole
  const wholeHalf = Math.floor(lag / 2)
  const shareHalf = lag / 2 - wholeHalf
  const stationsPerBlock = (stations * blocks.size) / rows
  for (let i = 0; i + whole + 1 < band.length; i++) {
    const value = band[i]
    const station = Math.min(stations - 1, Math.floor((i + 0.5) * stationsPerBlock)) + 1
    const atLag = band[i + whole] + share * (band[i + whole + 1] - band[i + whole])
    const atHalf = band[i + wholeHalf] + shareHalf * (band[i + wholeHalf + 1] - band[i + wholeHalf])
    energy[station] += value * value
    contrast[station] += value * (atLag - atHalf)
  }
  for (let s = 0; s < stations; s++) {
    energy[s + 1] += energy[s]
    contrast[s + 1] += contrast[s]
  }
  const strength = new Float64Array(stations)
  const half = (lagsPerWindow * lag * stationsPerBlock) / 2
  // What starts half a lag before a station lies around it.
  const shift = (lag * stationsPerBlock) / 2
  for (let s = 0; s < stations; s++) {
    const from = Math.max(0, s + 0.5 - half - shift)
    const to = Math.min(stations, s + 0.5 + half - shift)
    const power = sumUpTo(energy, to) - sumUpTo(energy, from)
    if (!(power > 0)) continue
    const lagsHeld = (to - from) / (lag * stationsPerBlock)
    strength[s] = (((sumUpTo(contrast, to) - sumUpTo(contrast, from)) / power) * lagsHeld) / (lagsHeld + doubtfulLags)
  }
  return strength
}
