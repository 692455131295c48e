import { checkAtLeast, checkFinite, checkPositive, Fault } from '../check.ts'

/** Half-life of 210Pb and its uncertainty [a]; kept with every result. Default: Chiste & Be 2007 (DDEP evaluation). */
export interface HalfLife {
  years: number
  sigma: number
}

export const lead210HalfLife: HalfLife = { years: 22.23, sigma: 0.12 }

/** Decay constant and its uncertainty [1/a]: ln 2 / T. */
export function decayConstant({ years, sigma }: HalfLife): { value: number; sigma: number } {
  const value = Math.LN2 / checkPositive('half-life', years)
  return { value, sigma: (value * checkAtLeast('error of the half-life', sigma, 0)) / years }
}

/** A value with its standard deviation. */
export interface Measured {
  value: number
  sigma: number
}

/**
 * Age by constant rate of supply (Appleby & Oldfield 1978, Catena 5, 1): t = ln(A0 / A) / lambda, A the unsupported inventory
 * below the level, A0 the whole. Error (Appleby 2001, from memory; A is a part of A0, so the two are correlated):
 * sigma^2 = [(t sigma_lambda)^2 + (sigma_A0 / A0)^2 + (1 - 2 A / A0) (sigma_A / A)^2] / lambda^2.
 */
export function crsAge(whole: Measured, below: Measured, halfLife: HalfLife = lead210HalfLife): Measured {
  const lambda = decayConstant(halfLife)
  const a0 = checkPositive('whole inventory', whole.value)
  const a = checkPositive('inventory below', below.value)
  const t = Math.log(a0 / a) / lambda.value
  const relative = (t * lambda.sigma) ** 2 + (whole.sigma / a0) ** 2 + (1 - (2 * a) / a0) * (below.sigma / a) ** 2
  // Near the surface the correlation takes all: the difference of two nearly equal terms may round below zero.
  return { value: t, sigma: Math.sqrt(Math.max(0, relative)) / lambda.value }
}

/** Mass accumulation by constant rate of supply: lambda A / C, relative errors in quadrature; in units of A per unit of C and year. */
export function crsRate(below: Measured, activity: Measured, halfLife: HalfLife = lead210HalfLife): Measured {
  const lambda = decayConstant(halfLife)
  const value = (lambda.value * below.value) / checkPositive('activity', activity.value)
  const relative = Math.hypot(lambda.sigma / lambda.value, below.sigma / below.value, activity.sigma / activity.value)
  return { value, sigma: value * relative }
}

/** Age by constant initial concentration: ln(C0 / C) / lambda, errors of both and of lambda in quadrature. */
export function cicAge(surface: Measured, activity: Measured, halfLife: HalfLife = lead210HalfLife): Measured {
  const lambda = decayConstant(halfLife)
  const c0 = checkPositive('surface activity', surface.value)
  const c = checkPositive('activity', activity.value)
  const t = Math.log(c0 / c) / lambda.value
  const sigma = Math.hypot(t * lambda.sigma, surface.sigma / c0, activity.sigma / c) / lambda.value
  return { value: t, sigma }
}

/** Sedimentation by constant flux and constant sedimentation: lambda / |slope| of ln C against depth or mass depth. */
export function cfcsRate(slope: number, halfLife: HalfLife = lead210HalfLife): number {
  if (!(slope < 0)) {
    const message = `the slope of ln C downcore must be negative for a constant sedimentation; it is ${slope}`
    throw new Fault('argument', 'slope', slope, message)
  }
  return decayConstant(halfLife).value / -checkFinite('slope', slope)
}

/** One slice of a 210Pb profile, downcore. */
export interface LeadSlice {
  /** Depth, mm. */
  top: number
  base: number
  /** Dry mass per area, kg m-2 (1 g cm-2 is 10). */
  mass: number
  /** Total 210Pb and its SD, Bq kg-1. */
  total: number
  sigma: number
}

export interface LeadProfile {
  slices: readonly LeadSlice[]
  /** Supported 210Pb (226Ra) and its SD, Bq kg-1: subtracted from all slices. */
  supported: Measured
  /** Unsupported inventory below the last slice, Bq m-2; null: estimated from the last slices where they allow it. */
  tail: Measured | null
  halfLife: HalfLife
}

/** Ages at the base of each slice. */
export interface LeadAges {
  slices: {
    base: number
    /** Unsupported activity, Bq kg-1. */
    unsupported: Measured
    /** Unsupported inventory below, Bq m-2. */
    below: Measured
    /** Years before coring; null where nothing is left below. */
    age: Measured | null
    /** kg m-2 a-1 by the slice's mass over the difference of ages, which is exact for any rate; null without both ages. */
    rate: number | null
  }[]
  whole: Measured
  /** Supply, Bq m-2 a-1: lambda times the whole inventory. */
  flux: number
  tail: Measured
  tailFrom: 'given' | 'estimated' | 'none'
  halfLife: HalfLife
  /** What a reader must know before using the ages, in words. */
  warnings: string[]
}

/** No 210Pb age is to be quoted beyond this: seven half-lives leave 0.8 %. */
const furthestAge = 150
/** The tail is estimated from so many last slices with unsupported activity above zero. */
const tailSlices = 4

/**
 * Dates a profile by constant rate of supply with its errors carried through: errors of slices independent, the error of the
 * supported activity shared by all. Without the inventory below the core's base all ages come out too old, the more so
 * downcore (MacKenzie et al. 2011): a base that still holds unsupported 210Pb is warned of.
 */
export function lead210Ages(profile: LeadProfile): LeadAges {
  const { slices, supported, halfLife } = profile
  checkSlices(slices)
  const unsupported = slices.map(({ total, sigma }) => ({
    value: total - supported.value,
    sigma: Math.hypot(sigma, supported.sigma),
  }))
  const { tail, tailFrom } = tailOf(profile, unsupported)
  const below = inventories(profile, unsupported, tail)
  const whole = below[0]
  if (!(whole.value > 0)) {
    const message = `the profile holds no unsupported 210Pb (inventory ${whole.value} Bq m-2); check the supported activity`
    throw new Fault('argument', 'supported', supported.value, message)
  }
  const ages = below.slice(1).map((one) => (one.value > 0 ? crsAge(whole, one, halfLife) : null))
  return {
    slices: slices.map(({ base, mass }, i) => {
      const before = i === 0 ? { value: 0 } : ages[i - 1]
      const age = ages[i]
      const rate = age && before && age.value > before.value ? mass / (age.value - before.value) : null
      return { base, unsupported: unsupported[i], below: below[i + 1], age, rate }
    }),
    whole,
    flux: decayConstant(halfLife).value * whole.value,
    tail,
    tailFrom,
    halfLife,
    warnings: warningsOf(unsupported, ages, whole, tail, tailFrom),
  }
}

function checkSlices(slices: readonly LeadSlice[]): void {
  if (slices.length < 2) {
    throw new Fault(
      'argument',
      'slices',
      slices.length,
      `a 210Pb profile needs at least two slices; it has ${slices.length}`,
    )
  }
  for (const [i, { top, base, mass, total, sigma }] of slices.entries()) {
    const at = `slice ${i + 1}`
    checkFinite(`total 210Pb of ${at}`, total)
    checkPositive(`mass of ${at}`, mass)
    checkPositive(`sigma of ${at}`, sigma)
    if (!(base > top)) throw new Fault('argument', at, base, `${at} must end below ${top} mm; it ends at ${base} mm`)
    if (i > 0 && !(top >= slices[i - 1].base)) {
      throw new Fault(
        'argument',
        at,
        top,
        `${at} must begin at or below ${slices[i - 1].base} mm; it begins at ${top} mm`,
      )
    }
  }
}

/** Unsupported inventory below the top of each slice and below the last one, [slices + 1]. */
function inventories({ slices, supported }: LeadProfile, unsupported: readonly Measured[], tail: Measured): Measured[] {
  const below: Measured[] = [tail]
  let value = tail.value
  let own = tail.sigma ** 2
  let mass = 0
  for (let i = slices.length - 1; i >= 0; i--) {
    value += slices[i].mass * unsupported[i].value
    own += (slices[i].mass * slices[i].sigma) ** 2
    mass += slices[i].mass
    below.unshift({ value, sigma: Math.sqrt(own + (supported.sigma * mass) ** 2) })
  }
  return below
}

/**
 * The inventory below the base: as given, or as if the decrease of ln C with mass over the last slices went on for ever,
 * C / b with b the slope of a straight line (constant supply and rate below the core; Appleby 2001, from memory).
 */
function tailOf({ slices, tail }: LeadProfile, unsupported: readonly Measured[]): Pick<LeadAges, 'tail' | 'tailFrom'> {
  if (tail) {
    checkAtLeast('inventory below the base', tail.value, 0)
    return { tail, tailFrom: 'given' }
  }
  const none = { tail: { value: 0, sigma: 0 }, tailFrom: 'none' } as const
  const last = slices.length - tailSlices
  if (last < 0) return none
  const points: { mass: number; log: number }[] = []
  let mass = 0
  for (let i = last; i < slices.length; i++) {
    // Activity that cannot be told from zero has no logarithm worth fitting, and leaves no tail worth adding.
    if (!(unsupported[i].value > 2 * unsupported[i].sigma)) return none
    points.push({ mass: mass + slices[i].mass / 2, log: Math.log(unsupported[i].value) })
    mass += slices[i].mass
  }
  const mean = (pick: (p: { mass: number; log: number }) => number) =>
    points.reduce((s, p) => s + pick(p), 0) / points.length
  const [m, l] = [mean((p) => p.mass), mean((p) => p.log)]
  const slope =
    points.reduce((s, p) => s + (p.mass - m) * (p.log - l), 0) / points.reduce((s, p) => s + (p.mass - m) ** 2, 0)
  if (!(slope < 0)) return none
  const value = Math.exp(l + slope * (mass - m)) / -slope
  // An extrapolation is good to about its half.
  return { tail: { value, sigma: value / 2 }, tailFrom: 'estimated' }
}

function warningsOf(
  unsupported: readonly Measured[],
  ages: readonly (Measured | null)[],
  whole: Measured,
  tail: Measured,
  tailFrom: LeadAges['tailFrom'],
): string[] {
  const warnings: string[] = []
  const last = unsupported[unsupported.length - 1]
  if (tailFrom === 'none' && last.value > 2 * last.sigma) {
    warnings.push(
      'the last slice still holds unsupported 210Pb: the inventory is cut short and all ages are too old, the more so downcore; give the inventory below the base',
    )
  }
  if (tailFrom === 'estimated') {
    const percent = Math.round((1000 * tail.value) / whole.value) / 10
    warnings.push(
      `${percent} % of the inventory lies below the last slice and was extrapolated from the last ${tailSlices}`,
    )
  }
  const rising = unsupported.findIndex(
    (one, i) => i > 0 && one.value > unsupported[i - 1].value + 2 * Math.hypot(one.sigma, unsupported[i - 1].sigma),
  )
  if (rising > 0) {
    warnings.push(
      `unsupported 210Pb rises downcore at slice ${rising + 1}: supply or rate changed; constant initial concentration and constant sedimentation do not hold`,
    )
  }
  if (ages.some((age) => age === null)) warnings.push('below some slices nothing unsupported is left: they have no age')
  if (ages.some((age) => age !== null && age.value > furthestAge)) {
    warnings.push(
      `ages beyond ${furthestAge} a are not to be quoted: seven half-lives leave less than 1 % of the 210Pb`,
    )
  }
  return warnings
}
