import { lagsPerOctave, type Periodicity } from './periodicity.ts'

/** What a change of lag by an octave over the length of ten lags costs, in units of strength per station. */
const changeCost = 1
/** From one station to the next the lag may change by so many steps. */
const mostSteps = 4

/**
 * The lag that is strongest down the whole core while changing slowly: the path through the strengths with the greatest sum
 * less the cost of its changes (dynamic programming, Bellman 1957). Returns the lag at each station, rows, between the lags
 * looked at by the vertex of a parabola.
 */
export function strongestRidge({ lags, stations, strength }: Periodicity, rows: number): Float64Array {
  const count = lags.length
  const stationRows = rows / stations
  const cameFrom = new Int32Array(count * stations)
  let best = Float64Array.from({ length: count }, (_, l) => strength[l * stations])
  for (let s = 1; s < stations; s++) {
    const next = new Float64Array(count)
    for (let l = 0; l < count; l++) {
      const costOfOctave = (10 * changeCost * lags[l]) / stationRows
      let most = -Infinity
      for (let k = Math.max(0, l - mostSteps); k <= Math.min(count - 1, l + mostSteps); k++) {
        const sum = best[k] - costOfOctave * ((k - l) / lagsPerOctave) ** 2
        if (sum > most) {
          most = sum
          cameFrom[l * stations + s] = k
        }
      }
      next[l] = most + strength[l * stations + s]
    }
    best = next
  }
  let lag = best.indexOf(best.reduce((most, value) => Math.max(most, value), -Infinity))
  const ridge = new Float64Array(stations)
  for (let s = stations - 1; s >= 0; s--) {
    ridge[s] = lags[lag] * 2 ** (betweenLags(strength, lag, count, stations, s) / lagsPerOctave)
    lag = cameFrom[lag * stations + s]
  }
  return ridge
}

/** Offset, in steps, of the summit of the strengths around a lag; 0 where it is no summit. */
function betweenLags(strength: Float64Array, lag: number, count: number, stations: number, station: number): number {
  if (lag === 0 || lag === count - 1) return 0
  const before = strength[(lag - 1) * stations + station]
  const here = strength[lag * stations + station]
  const after = strength[(lag + 1) * stations + station]
  if (before > here || after > here || !(before + after < 2 * here)) return 0
  return (before - after) / (2 * (before - 2 * here + after))
}
