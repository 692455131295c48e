/**
 * Radiocarbon calibration curves: calendar age (cal BP, years before 1950) against conventional radiocarbon age or F14C.
 * Nothing here assumes that the curve is monotonous; between rows it is a straight line, beyond its ends there is none.
 */
import { Fault } from '../check.ts'
import { intcal20Nodes, intcal20NodesSha256 } from './intcal20Nodes.ts'

/** Libby mean-life: 14C age = -8033 ln F14C (Stuiver & Polach 1977, Radiocarbon 19, 355). */
export const libbyMeanLife = 8033

/** A curve as published: rows sorted by cal BP, young to old; columns [rows]. */
export interface Curve {
  /** How the curve is called in reports. */
  name: string
  /** SHA-256 of the file it came from, so that a result names exactly what it was calibrated with. */
  sha256: string
  citation: string
  /** Rows were left out of the published table. */
  reduced: boolean
  /** What `value` and `sigma` hold: conventional radiocarbon age (14C a before 1950) or F14C. */
  quantity: 'age' | 'f14c'
  calBP: Float64Array
  value: Float64Array
  /** Standard deviation, in the unit of `value`. */
  sigma: Float64Array
}

/** A curve read off at every calendar year, columns [years]; entry i belongs to `from + i` cal BP. */
export interface YearlyCurve {
  from: number
  age: Float64Array
  ageSigma: Float64Array
  f14c: Float64Array
  f14cSigma: Float64Array
  /** The curves it was made from. */
  sources: { name: string; sha256: string; reduced: boolean; citation: string }[]
}

let builtIn: Curve | undefined

/** The table the program carries: IntCal20 reduced to 2,005 of its published rows (Reimer et al. 2020, CC BY 4.0). */
export function builtInCurve(): Curve {
  builtIn ??= readNodes()
  return builtIn
}

function readNodes(): Curve {
  const rows = intcal20Nodes.split(',').map((row) => row.trim().split(' ').map(Number))
  return {
    name: 'IntCal20, reduced table',
    sha256: intcal20NodesSha256,
    citation:
      'Reimer, P. J., et al. (2020). The IntCal20 Northern Hemisphere radiocarbon age calibration curve (0-55 cal kBP). Radiocarbon 62(4), 725-757, doi 10.1017/RDC.2020.41 (CC BY 4.0); 2,005 of its 9,501 rows',
    reduced: true,
    quantity: 'age',
    calBP: Float64Array.from(rows, (row) => row[0]),
    value: Float64Array.from(rows, (row) => row[1]),
    sigma: Float64Array.from(rows, (row) => row[2]),
  }
}

/** 14C age of an F14C and back (Stuiver & Polach 1977). */
export const ageOfF14c = (f14c: number) => -libbyMeanLife * Math.log(f14c)
export const f14cOfAge = (age: number) => Math.exp(-age / libbyMeanLife)
/** Error of an age from the error of its F14C, to first order, and back. */
export const ageErrorOfF14c = (f14c: number, sigma: number) => (libbyMeanLife * sigma) / f14c
export const f14cErrorOfAge = (age: number, sigma: number) => (f14cOfAge(age) * sigma) / libbyMeanLife

/** Delta14C in permil of a radiocarbon age at a calendar age: 1000 (F exp(cal BP / 8267) - 1) (Stuiver & Polach 1977). */
export function delta14c(age: number, calBP: number): number {
  return 1000 * (f14cOfAge(age) * Math.exp(calBP / 8267) - 1)
}

/** The curve's value at a calendar age that need not be whole, by a straight line; refused outside the curve. */
export function curveValueAt(curve: Curve, calBP: number): { value: number; sigma: number } {
  const rows = curve.calBP
  const last = rows.length - 1
  if (!(calBP >= rows[0] && calBP <= rows[last])) {
    throw new Fault(
      'argument',
      'cal BP',
      calBP,
      `${curve.name} runs from ${rows[0]} to ${rows[last]} cal BP; it says nothing at ${calBP} cal BP`,
    )
  }
  let low = 0
  let high = last
  while (high - low > 1) {
    const middle = (low + high) >> 1
    if (rows[middle] <= calBP) low = middle
    else high = middle
  }
  const share = high === low ? 0 : (calBP - rows[low]) / (rows[high] - rows[low])
  return {
    value: curve.value[low] + share * (curve.value[high] - curve.value[low]),
    sigma: curve.sigma[low] + share * (curve.sigma[high] - curve.sigma[low]),
  }
}

/** Reads a curve off at every whole cal BP it covers, in both quantities (linear interpolation of value and sigma). */
export function yearlyCurve(curve: Curve): YearlyCurve {
  const { calBP, value, sigma } = curve
  const from = Math.ceil(calBP[0])
  const length = Math.floor(calBP[calBP.length - 1]) - from + 1
  if (!(length > 0)) {
    throw new Fault('format', 'curve', curve.name, `${curve.name} covers no whole calendar year; it needs more rows`)
  }
  const columns = emptyYears(from, length, [curve])
  let row = 0
  for (let i = 0; i < length; i++) {
    const at = from + i
    while (row < calBP.length - 2 && calBP[row + 1] <= at) row++
    const share = (at - calBP[row]) / (calBP[row + 1] - calBP[row])
    const v = value[row] + share * (value[row + 1] - value[row])
    const s = sigma[row] + share * (sigma[row + 1] - sigma[row])
    setYear(columns, i, curve.quantity, v, s)
  }
  return columns
}

/**
 * One curve that runs on past 1950: the first wherever it has a value, the post-bomb one before it (younger).
 * A gap between the two is refused.
 */
export function joinPostBomb(curve: Curve, postBomb: Curve): YearlyCurve {
  const older = yearlyCurve(curve)
  const younger = yearlyCurve(postBomb)
  const youngerEnd = younger.from + younger.age.length
  if (!(younger.from < older.from)) {
    const message = `${postBomb.name} begins at ${younger.from} cal BP and adds nothing younger to ${curve.name}, which begins at ${older.from} cal BP`
    throw new Fault('argument', 'post-bomb curve', postBomb.name, message)
  }
  if (youngerEnd < older.from) {
    const message = `${postBomb.name} ends at ${youngerEnd - 1} cal BP and leaves a gap before ${curve.name}, which begins at ${older.from} cal BP`
    throw new Fault('argument', 'post-bomb curve', postBomb.name, message)
  }
  const ahead = older.from - younger.from
  const joined = emptyYears(younger.from, ahead + older.age.length, [curve, postBomb])
  for (const column of ['age', 'ageSigma', 'f14c', 'f14cSigma'] as const) {
    joined[column].set(younger[column].subarray(0, ahead))
    joined[column].set(older[column], ahead)
  }
  return joined
}

function emptyYears(from: number, length: number, curves: Curve[]): YearlyCurve {
  return {
    from,
    age: new Float64Array(length),
    ageSigma: new Float64Array(length),
    f14c: new Float64Array(length),
    f14cSigma: new Float64Array(length),
    sources: curves.map(({ name, sha256, reduced, citation }) => ({ name, sha256, reduced, citation })),
  }
}

function setYear(years: YearlyCurve, i: number, quantity: Curve['quantity'], value: number, sigma: number): void {
  const asAge = quantity === 'age'
  years.age[i] = asAge ? value : ageOfF14c(value)
  years.ageSigma[i] = asAge ? sigma : ageErrorOfF14c(value, sigma)
  years.f14c[i] = asAge ? f14cOfAge(value) : value
  years.f14cSigma[i] = asAge ? f14cErrorOfAge(value, sigma) : sigma
}
