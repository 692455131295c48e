import { describe, Fault } from '../check.ts'

/** Longer lengths than any scan has. */
const longestLength = 1e7

/** A length of the recipe in path pixels, or null where it is taken from the profile. */
export function checkLengthOrNull(field: string, value: unknown, least: number): void {
  if (value === null || (typeof value === 'number' && value >= least && value <= longestLength)) return
  const rule = `between ${least} and ${longestLength} path pixels, or null to take it from the profile`
  throw new Fault('argument', field, value, `${field} must be ${rule}; it is ${describe(value)}`)
}

export function checkFlag(field: string, value: unknown): void {
  if (typeof value !== 'boolean') {
    throw new Fault('argument', field, value, `${field} must be true or false; it is ${describe(value)}`)
  }
}
