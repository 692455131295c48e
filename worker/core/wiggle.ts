import { checkInteger, checkPositive, Fault } from '../check.ts'
import { chiSquareBeyond } from './chiSquare.ts'
import type { YearlyCurve } from './curve.ts'
import { densityOf, normalModel } from './errorModel.ts'
import type { ErrorModel } from './errorModel.ts'
import { hpdLevels, hpdRanges, normalise, yearFigures } from './hpd.ts'
import type { HpdRange, YearFigures } from './hpd.ts'

/** One date of a floating series whose years are counted exactly. */
export interface WiggleDate {
  /** Years by which the sample is older than the level whose age is sought (negative: younger); need not be whole. */
  older: number
  age: number
  sigma: number
}

/** The age of the reference level of a floating series, cal BP; `probability[i]` belongs to `from + i`. */
export interface WiggleMatch extends YearFigures {
  from: number
  probability: Float64Array
  hpd68: HpdRange[]
  hpd95: HpdRange[]
  /** Sum of squared standardised deviations at each placement, [placements]. */
  chiSquare: Float64Array
  best: { calBP: number; chiSquare: number; degrees: number; probability: number }
}

/** Offsets within which placements are tried; both ends whole cal BP. */
export interface Window {
  from: number
  to: number
}

/**
 * Places a floating series on the curve (Bronk Ramsey, van der Plicht & Weninger 2001, Radiocarbon 43, 381; Christen & Litton
 * 1995): p(t) proportional to prod_i p(y_i | t + older_i), flat over the window. The lattice with exact counts and no bias
 * is the same thing; this form needs no layers and takes offsets that are not whole years.
 */
export function wiggleMatch(
  dates: readonly WiggleDate[],
  curve: YearlyCurve,
  within: Window | null = null,
  model: ErrorModel = normalModel,
): WiggleMatch {
  if (dates.length === 0) throw new Fault('argument', 'dates', 0, 'a wiggle match needs at least one date')
  const { from, to } = placements(dates, curve, within)
  const density = densityOf(model)
  const logs = new Float64Array(to - from + 1)
  const chiSquare = new Float64Array(to - from + 1)
  for (const { older, age, sigma } of dates) {
    checkPositive('sigma', sigma)
    const shift = Math.floor(older)
    const share = older - shift
    for (let i = 0; i < logs.length; i++) {
      const at = from + i + shift - curve.from
      const next = share > 0 ? at + 1 : at
      const mu = curve.age[at] + share * (curve.age[next] - curve.age[at])
      const curveSigma = curve.ageSigma[at] + share * (curve.ageSigma[next] - curve.ageSigma[at])
      const s = Math.hypot(sigma, curveSigma)
      logs[i] += Math.log(density(age - mu, s))
      chiSquare[i] += ((age - mu) / s) ** 2
    }
  }
  return matchOf(logs, chiSquare, from, dates.length)
}

/** Placements at which every date lies on the curve, within the window. */
function placements(dates: readonly WiggleDate[], curve: YearlyCurve, within: Window | null): Window {
  const oldest = dates.reduce((most, { older }) => Math.max(most, older), -Infinity)
  const youngest = dates.reduce((least, { older }) => Math.min(least, older), Infinity)
  const end = curve.from + curve.age.length - 1
  const least = Math.ceil(curve.from - youngest)
  const most = Math.floor(end - oldest)
  if (within) {
    checkInteger('window from', within.from, -1e6)
    checkInteger('window to', within.to, within.from)
  }
  const from = Math.max(least, within?.from ?? least)
  const to = Math.min(most, within?.to ?? most)
  if (!(to >= from)) {
    const message = `the series of ${oldest - youngest} years fits nowhere on the curve (${curve.from} to ${end} cal BP)${within ? ` within ${within.from} to ${within.to} cal BP` : ''}`
    throw new Fault('argument', 'dates', oldest - youngest, message)
  }
  return { from, to }
}

function matchOf(logs: Float64Array, chiSquare: Float64Array, from: number, dates: number): WiggleMatch {
  const highest = logs.reduce((a, b) => Math.max(a, b), -Infinity)
  if (!(highest > -Infinity)) {
    throw new Fault('conflict', 'dates', dates, 'no placement of the series on the curve is possible; check its dates')
  }
  const probability = logs.map((log) => Math.exp(log - highest))
  normalise(probability)
  let least = 0
  for (let i = 1; i < chiSquare.length; i++) if (chiSquare[i] < chiSquare[least]) least = i
  const degrees = dates - 1
  return {
    from,
    probability,
    ...yearFigures(probability, from),
    hpd68: hpdRanges(probability, from, hpdLevels[0]),
    hpd95: hpdRanges(probability, from, hpdLevels[1]),
    chiSquare,
    best: {
      calBP: from + least,
      chiSquare: chiSquare[least],
      degrees,
      probability: degrees > 0 ? chiSquareBeyond(chiSquare[least], degrees) : 1,
    },
  }
}
