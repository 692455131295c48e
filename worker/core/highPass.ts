import { checkPositive } from '../check.ts'
import { powerOfTwoFrom, transform, transformBack } from './fourier.ts'

/** The edge of the filter reaches from this to that many times the cut-off frequency. */
const edgeFrom = 0.75
const edgeTo = 1.25

/**
 * What a column holds of waves longer than `longest` rows: its trend, to be taken off for a high-pass. In the frequency domain
 * 1 below 0.75, 0 above 1.25 times the cut-off 1 / longest, a raised cosine between. The mean is taken off before the
 * transform; the column is mirrored at its ends and drawn straight across gaps, so that neither rings; gaps stay gaps (NaN).
 */
export function longWaves(column: Float64Array, longest: number): Float64Array {
  checkPositive('window', longest)
  const rows = column.length
  const filled = bridged(column)
  const trend = new Float64Array(rows).fill(NaN)
  if (!filled) return trend
  const mirrored = Math.min(rows - 1, Math.ceil(2 * longest))
  const size = powerOfTwoFrom(rows + 2 * mirrored)
  const mean = filled.reduce((sum, value) => sum + value, 0) / rows
  const padded = new Float64Array(size)
  for (let i = -mirrored; i < rows + mirrored; i++) {
    const row = i < 0 ? -i : i < rows ? i : 2 * (rows - 1) - i
    padded[(i + size) % size] = filled[row] - mean
  }
  const { real, imaginary } = transform(padded)
  for (let k = 0; k < size; k++) {
    const frequency = Math.min(k, size - k) / size
    const pass = 1 - raisedCosine((frequency * longest - edgeFrom) / (edgeTo - edgeFrom))
    real[k] *= pass
    imaginary[k] *= pass
  }
  const waves = transformBack({ real, imaginary })
  for (let row = 0; row < rows; row++) if (Number.isFinite(column[row])) trend[row] = mean + waves[row]
  return trend
}

/** 0 up to 0, 1 from 1, half a cosine between. */
export function raisedCosine(share: number): number {
  return share <= 0 ? 0 : share >= 1 ? 1 : 0.5 * (1 - Math.cos(Math.PI * share))
}

/** The column with straight lines across its gaps and level ends; null where it has no readable row. */
function bridged(column: Float64Array): Float64Array | null {
  const filled = column.slice()
  let before = -1
  for (let row = 0; row < column.length; row++) {
    if (!Number.isFinite(column[row])) continue
    for (let gap = before + 1; gap < row; gap++) {
      const share = before < 0 ? 1 : (gap - before) / (row - before)
      filled[gap] = (before < 0 ? 0 : (1 - share) * column[before]) + share * column[row]
    }
    before = row
  }
  if (before < 0) return null
  filled.fill(column[before], before + 1)
  return filled
}
