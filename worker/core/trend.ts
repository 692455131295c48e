import { longWaves } from './highPass.ts'
import { loess } from './loess.ts'
import { movingMean, movingMedian } from './movingWindow.ts'
import { medianOf } from './quickselect.ts'

export type TrendMethod = 'moving-median' | 'moving-mean' | 'loess' | 'high-pass' | 'none'

/** Rounds in which outlying rows lose their say in a LOESS trend. */
const robustRounds = 2
/** LOESS fits stand this share of the window apart; between them the trend is straight. */
const deltaShare = 0.05
/** Ratio of neighbouring cut-offs where the window of a high-pass changes down the core. */
const cutOffRatio = 1.5

/** Trend of a column over a window, rows, that may change from row to row; NaN in its gaps. */
export function trendOf(column: Float64Array, method: TrendMethod, window: Float64Array): Float64Array {
  switch (method) {
    case 'moving-median':
      return movingMedian(column, halves(window))
    case 'moving-mean':
      return movingMean(column, halves(window))
    case 'loess':
      return loessTrend(column, window)
    case 'high-pass':
      return longWavesOf(column, window)
    case 'none':
      return levelOf(column)
  }
}

function halves(window: Float64Array): Int32Array {
  return Int32Array.from(window, (rows) => Math.max(1, Math.round(rows / 2)))
}

function loessTrend(column: Float64Array, window: Float64Array): Float64Array {
  const trend = new Float64Array(column.length).fill(NaN)
  const rows = Int32Array.from([...column.keys()].filter((row) => Number.isFinite(column[row])))
  if (rows.length === 0) return trend
  const neighbours = Float64Array.from(rows, (row) => Math.max(3, Math.round(window[row])))
  const narrowest = neighbours.reduce((least, value) => Math.min(least, value), Infinity)
  const fit = loess(
    Float64Array.from(rows),
    Float64Array.from(rows, (row) => column[row]),
    {
      neighbours,
      degree: 1,
      robustRounds,
      delta: deltaShare * narrowest,
    },
  )
  rows.forEach((row, i) => (trend[row] = fit[i]))
  return trend
}

/** Where the cut-off changes, the column is filtered at a few of them, and each row lies between its two neighbours. */
function longWavesOf(column: Float64Array, window: Float64Array): Float64Array {
  const trend = new Float64Array(column.length).fill(NaN)
  const least = window.reduce((low, value) => Math.min(low, value), Infinity)
  const most = window.reduce((high, value) => Math.max(high, value), 0)
  const steps = Math.ceil(Math.log(most / least) / Math.log(cutOffRatio) - 1e-9)
  const placeOf = (row: number) => (steps > 0 ? (steps * Math.log(window[row] / least)) / Math.log(most / least) : 0)
  for (let step = 0; step <= steps; step++) {
    const waves = longWaves(column, steps > 0 ? least * (most / least) ** (step / steps) : least)
    for (let row = 0; row < column.length; row++) {
      const share = 1 - Math.abs(placeOf(row) - step)
      if (share > 0) trend[row] = (Number.isNaN(trend[row]) ? 0 : trend[row]) + share * waves[row]
    }
  }
  return trend
}

/** No trend: the median of the whole column, so that the rest lies around 0. */
function levelOf(column: Float64Array): Float64Array {
  const readable = Float32Array.from(column.filter((value) => Number.isFinite(value)))
  const level = medianOf(readable, readable.length)
  return column.map((value) => (Number.isFinite(value) ? level : NaN))
}
