/**
 * Reading untrusted JSON: small readers that check a value and build a fresh one, naming the place in a Fault when it is
 * not of the expected form. An object must have exactly the expected own keys, so a hostile key (`__proto__`,
 * `constructor`) is an unknown key like any other and never reaches a fresh object.
 *
 * Exports: `Reader<T>` and the readers `text`, `identifier`, `finite`, `within`, `whole`, `flag`, `oneOf`, `oneOfNumbers`,
 * `nullable`, `listOf`, `pairOf`, `recordOf`, `someOf`, `jsonValue`.
 */
import { Fault, describe } from '../../worker/check.ts'

/** Checks `value`, found at `at` (for example `sections[2].scale`), and returns it as T; throws a Fault otherwise. */
export type Reader<T> = (value: unknown, at: string) => T

export type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json }

export function refuse(at: string, value: unknown, rule: string): never {
  throw new Fault('format', at, value, `${named(at)} must be ${rule}; it is ${describe(value)}`)
}

/** A place as it stands in a message; the outermost has no name of its own. */
function named(at: string): string {
  return at === '' ? 'this file' : at
}

export function text(most: number): Reader<string> {
  return (value, at) => {
    if (typeof value !== 'string') refuse(at, value, 'text')
    if (value.length > most) refuse(at, value, `text of at most ${most} characters`)
    return value
  }
}

/** An id: letters, digits, `-`, `_`, 1 to 64 long, so that it can stand in a file name. */
export const identifier: Reader<string> = (value, at) => {
  if (typeof value !== 'string' || !/^[A-Za-z0-9_-]{1,64}$/.test(value)) {
    refuse(at, value, 'an id of 1 to 64 letters, digits, - or _')
  }
  // An id may come to be a key of an object.
  if (value === '__proto__') refuse(at, value, 'an id other than __proto__')
  return value
}

export const sha256Text: Reader<string> = (value, at) => {
  if (typeof value !== 'string' || !/^[0-9a-f]{64}$/.test(value))
    refuse(at, value, 'a SHA-256 of 64 hexadecimal digits')
  return value
}

export const finite: Reader<number> = (value, at) => {
  if (typeof value !== 'number' || !Number.isFinite(value)) refuse(at, value, 'a finite number')
  return value + 0
}

export function within(least: number, most: number): Reader<number> {
  return (value, at) => {
    if (typeof value !== 'number' || !(value >= least && value <= most)) {
      refuse(at, value, `a number from ${least} to ${most}`)
    }
    return value + 0
  }
}

/** Greater than `least`, at most `most`. */
export function above(least: number, most: number): Reader<number> {
  return (value, at) => {
    if (typeof value !== 'number' || !(value > least && value <= most)) {
      refuse(at, value, `a number greater than ${least}, at most ${most}`)
    }
    return value
  }
}

export function whole(least: number, most: number): Reader<number> {
  return (value, at) => {
    if (typeof value !== 'number' || !Number.isInteger(value) || value < least || value > most) {
      refuse(at, value, `a whole number from ${least} to ${most}`)
    }
    return value + 0
  }
}

export const flag: Reader<boolean> = (value, at) => {
  if (typeof value !== 'boolean') refuse(at, value, 'true or false')
  return value
}

export function oneOf<T extends string | number>(...allowed: readonly T[]): Reader<T> {
  return (value, at) => {
    if (!allowed.includes(value as T)) refuse(at, value, `one of ${allowed.join(', ')}`)
    return value as T
  }
}

export function nullable<T>(read: Reader<T>): Reader<T | null> {
  return (value, at) => (value === null ? null : read(value, at))
}

export function listOf<T>(read: Reader<T>, most: number): Reader<T[]> {
  return (value, at) => {
    if (!Array.isArray(value)) refuse(at, value, 'a list')
    if (value.length > most) refuse(at, value, `a list of at most ${most}`)
    return value.map((item, index) => read(item, `${at}[${index}]`))
  }
}

/** The own keys of a plain object; anything else is refused. */
function keysOf(value: unknown, at: string): Record<string, unknown> {
  if (typeof value !== 'object' || value === null || Array.isArray(value)) refuse(at, value, 'an object')
  return value as Record<string, unknown>
}

/**
 * An object with exactly these keys, and any of the optional ones. Built key by key in the order of `fields`, so that
 * equal content has equal text.
 */
export function recordOf<T extends object, Optional extends object = object>(
  fields: { readonly [K in keyof T]-?: Reader<T[K]> },
  optional: { readonly [K in keyof Optional]-?: Reader<Optional[K]> } = {} as never,
): Reader<T & Partial<Optional>> {
  const readers = { ...fields, ...optional } as Record<string, Reader<unknown>>
  const names = Object.keys(readers)
  return (value, at) => {
    const source = keysOf(value, at)
    for (const key of Object.keys(source)) {
      if (!Object.hasOwn(readers, key)) unknownKey(at, key, names)
    }
    const result: Record<string, unknown> = {}
    for (const name of names) {
      if (Object.hasOwn(source, name)) result[name] = readers[name](source[name], join(at, name))
      else if (!Object.hasOwn(optional, name)) {
        throw new Fault('format', join(at, name), undefined, `${join(at, name)} is missing`)
      }
    }
    return result as T & Partial<Optional>
  }
}

/** An object with at least one of these keys and no other: the fields an edit changes. */
export function someOf<T extends object>(fields: { readonly [K in keyof T]-?: Reader<T[K]> }): Reader<Partial<T>> {
  const names = Object.keys(fields) as (keyof T & string)[]
  return (value, at) => {
    const source = keysOf(value, at)
    const result: Partial<T> = {}
    const keys = Object.keys(source)
    if (keys.length === 0) refuse(at, value, `an object with some of the keys ${names.join(', ')}`)
    for (const key of keys) {
      if (!Object.hasOwn(fields, key)) unknownKey(at, key, names)
      const name = key as keyof T & string
      result[name] = fields[name](source[name], join(at, name))
    }
    return result
  }
}

function unknownKey(at: string, key: string, names: readonly string[]): never {
  throw new Fault('format', at, key, `${named(at)} has an unknown key ${describe(key)}; known are ${names.join(', ')}`)
}

function join(at: string, key: string): string {
  return at === '' ? key : `${at}.${key}`
}

const forbiddenKeys = ['__proto__', 'constructor', 'prototype']

/** Any JSON value of limited depth and size, without keys that could reach a prototype. */
export const jsonValue: Reader<Json> = (value, at) => readJson(value, at, 12)

function readJson(value: unknown, at: string, depth: number): Json {
  if (value === null || typeof value === 'boolean') return value
  if (typeof value === 'number') return finite(value, at)
  if (typeof value === 'string') return text(100_000)(value, at)
  if (depth === 0) refuse(at, value, 'nested less deeply')
  if (Array.isArray(value)) return listOf((item, place) => readJson(item, place, depth - 1), 100_000)(value, at)
  const result: Record<string, Json> = {}
  for (const [key, item] of Object.entries(keysOf(value, at))) {
    if (forbiddenKeys.includes(key)) refuse(join(at, key), key, 'left out: this key is not allowed')
    result[key] = readJson(item, join(at, key), depth - 1)
  }
  return result
}
