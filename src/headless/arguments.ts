import { parseArgs } from 'node:util'
import { checkFinite, describe, Fault } from '../../worker/check.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import { scanPixels, type Point } from '../../worker/units.ts'
import type { Call, Options, Verb } from './verb.ts'

/** Options of every verb. */
const common = { help: { type: 'boolean' }, json: { type: 'boolean' }, out: { type: 'string' } } as const

/** Reads what follows the verb; an unknown, repeated or incomplete option is a Fault. */
export function parseCall(verb: Verb, words: readonly string[]): Call {
  const options = { ...verb.options, ...common }
  try {
    const { values, positionals, tokens } = parseArgs({
      args: withNegativeValues(words, options),
      options,
      allowPositionals: true,
      strict: true,
      tokens: true,
    })
    const seen = new Set<string>()
    for (const token of tokens) {
      if (token.kind !== 'option') continue
      if (seen.has(token.name)) argumentFault(token.rawName, token.value, `${token.rawName} is given twice`)
      seen.add(token.name)
    }
    return { words: positionals, options: values }
  } catch (error) {
    if (error instanceof Error && 'code' in error && String(error.code).startsWith('ERR_PARSE_ARGS')) {
      argumentFault('arguments', words, error.message.split(/\.\s/)[0])
    }
    throw error
  }
}

/** `--top-year -50` is meant as `--top-year=-50`: a value that starts with a digit after its minus is a number, no option. */
function withNegativeValues(words: readonly string[], options: Verb['options']): string[] {
  const joined: string[] = []
  for (const word of words) {
    const before = joined.at(-1)
    const takesValue =
      before?.startsWith('--') &&
      before.length > 2 &&
      Object.hasOwn(options, before.slice(2)) &&
      options[before.slice(2)].type === 'string'
    if (takesValue && /^-[\d.]/.test(word) && !joined.includes('--')) joined[joined.length - 1] = `${before}=${word}`
    else joined.push(word)
  }
  return joined
}

export function argumentFault(field: string, value: unknown, message: string): never {
  throw new Fault('argument', field, value, message)
}

/** The words of a call, exactly as many as have names. */
export function wordsOf(call: Call, ...names: string[]): string[] {
  if (call.words.length < names.length) {
    const missing = names[call.words.length]
    argumentFault(missing, undefined, `${missing} is missing`)
  }
  if (call.words.length > names.length) {
    const extra = call.words[names.length]
    argumentFault('arguments', extra, `${describe(extra)} is one argument too many`)
  }
  return call.words
}

export function textOption(options: Options, name: string): string | null {
  const value = options[name]
  if (value === undefined) return null
  if (typeof value !== 'string' || value === '') argumentFault(`--${name}`, value, `--${name} needs a value`)
  return value
}

/** A number in plain or exponent notation; anything else ("", "1,5", "0x10", "NaN") is a Fault. */
export function numberFrom(field: string, text: string): number {
  const plain = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(text.trim())
  if (!plain) argumentFault(field, text, `${field} must be a number; it is ${describe(text)}`)
  return checkFinite(field, Number(text))
}

export function numberOption(options: Options, name: string): number | null {
  const text = textOption(options, name)
  return text === null ? null : numberFrom(`--${name}`, text)
}

/** A path as "x0,y0 x1,y1 …", scan pixels, young end first. */
export function pathOption(options: Options, name: string): Point[] | null {
  const text = textOption(options, name)
  if (text === null) return null
  const points = text.trim().split(/[\s;]+/)
  if (points.length < 2) {
    argumentFault(
      `--${name}`,
      text,
      `--${name} must have at least two points, "x0,y0 x1,y1", young end first; it is ${describe(text)}`,
    )
  }
  return points.map((point, i) => {
    const parts = point.split(',')
    if (parts.length !== 2) {
      argumentFault(`--${name}`, point, `point ${i + 1} of --${name} must be "x,y"; it is ${describe(point)}`)
    }
    const [x, y] = parts.map((part, k) => numberFrom(`${k === 0 ? 'x' : 'y'} of point ${i + 1} of --${name}`, part))
    return { x: scanPixels(x), y: scanPixels(y) }
  })
}

const orientations: Readonly<Record<string, Orientation>> = {
  'young-left': { axis: 'x', young: 'low' },
  'young-right': { axis: 'x', young: 'high' },
  'young-up': { axis: 'y', young: 'low' },
  'young-down': { axis: 'y', young: 'high' },
}

export function orientationOption(options: Options, name: string): Orientation | null {
  const text = textOption(options, name)
  if (text === null) return null
  if (!Object.hasOwn(orientations, text)) {
    const known = Object.keys(orientations).join(', ')
    argumentFault(`--${name}`, text, `--${name} must be one of ${known}; it is ${describe(text)}`)
  }
  return orientations[text]
}
