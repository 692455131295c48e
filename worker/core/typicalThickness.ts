import { movingMean } from './movingWindow.ts'
import { findPeaks } from './peaks.ts'
import { gaussianSmooth } from './smoothing.ts'

/** Typical layer thickness around each row, path pixels. */
export function typicalThickness(column: Float64Array): Float64Array {
  let thickness = 12
  for (let round = 0; round < 12; round++) {
    const smooth = gaussianSmooth(column, Math.max(0.5, thickness / 8))
    const trend = movingMean(column, Math.round(3 * thickness))
    let squares = 0
    let readable = 0
    const signal = smooth.map((value, row) => {
      if (!Number.isNaN(value)) {
        squares += (value - trend[row]) ** 2
        readable++
      }
      return value - trend[row]
    })
    const peaks = findPeaks(signal, { prominence: Math.sqrt(squares / Math.max(1, readable)) })
    const next = readable / Math.max(1, peaks.index.length)
    if (Math.abs(next - thickness) < 0.01 * thickness) break
    thickness = Math.min(next, readable / 3)
  }
  return new Float64Array(column.length).fill(thickness)
}
