/**
 * Argument checks. Every error names the parameter, the rule and the value received;
 * comparisons are written so that NaN fails them.
 */

export type FaultCode = 'argument' | 'format' | 'unreadable' | 'too-large' | 'unsupported' | 'conflict' | 'internal'

/** What went wrong, in words for the person at the bench: what, where, and what to do. */
export class Fault extends Error {
  readonly code: FaultCode
  readonly field: string
  readonly value: string
  constructor(code: FaultCode, field: string, value: unknown, message: string) {
    super(message)
    this.name = 'Fault'
    this.code = code
    this.field = field
    this.value = describe(value)
  }
}

/** A short, safe rendering of any received value. */
export function describe(value: unknown): string {
  if (typeof value === 'string') return JSON.stringify(value.length > 60 ? `${value.slice(0, 60)}…` : value)
  if (typeof value === 'number' || typeof value === 'boolean' || value == null) return String(value)
  if (Array.isArray(value) || ArrayBuffer.isView(value)) {
    return `${value.constructor.name} of ${(value as { length?: number }).length ?? value.constructor.name}`
  }
  return typeof value
}

function reject(field: string, value: unknown, rule: string): never {
  throw new Fault('argument', field, value, `${field} must be ${rule}; it is ${describe(value)}`)
}

export function checkFinite(field: string, value: unknown): number {
  if (typeof value !== 'number' || !Number.isFinite(value)) reject(field, value, 'a finite number')
  return value
}

export function checkPositive(field: string, value: unknown): number {
  if (typeof value !== 'number' || !(value > 0) || value === Infinity) reject(field, value, 'a number greater than 0')
  return value
}

export function checkAtLeast(field: string, value: unknown, least: number): number {
  if (typeof value !== 'number' || !(value >= least) || value === Infinity)
    reject(field, value, `a number of at least ${least}`)
  return value
}

export function checkWithin(field: string, value: unknown, least: number, most: number): number {
  if (typeof value !== 'number' || !(value >= least && value <= most))
    reject(field, value, `between ${least} and ${most}`)
  return value
}

export function checkInteger(field: string, value: unknown, least: number, most = Number.MAX_SAFE_INTEGER): number {
  if (typeof value !== 'number' || !Number.isInteger(value) || value < least || value > most) {
    reject(
      field,
      value,
      most === Number.MAX_SAFE_INTEGER
        ? `a whole number of at least ${least}`
        : `a whole number from ${least} to ${most}`,
    )
  }
  return value
}

export function checkOneOf<T extends string>(field: string, value: unknown, allowed: readonly T[]): T {
  if (!allowed.includes(value as T)) reject(field, value, `one of ${allowed.join(', ')}`)
  return value as T
}

export function checkSameLength(field: string, value: ArrayLike<unknown>, expected: number): void {
  if (value.length !== expected) reject(field, value, `${expected} long`)
}
