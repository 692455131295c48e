import { describe, expect, it } from 'vitest'
import {
  numberFrom,
  numberOption,
  orientationOption,
  parseCall,
  pathOption,
  wordsOf,
} from '../../src/headless/arguments.ts'
import type { Verb } from '../../src/headless/verb.ts'

const verb: Verb = {
  name: 'try',
  summary: '',
  help: '',
  options: { size: { type: 'string' }, fast: { type: 'boolean' } },
  run: () => Promise.resolve(),
}

describe('a command line', () => {
  it('is words and options in any order', () => {
    const call = parseCall(verb, ['a', '--size', '3', 'b', '--fast', '--json', '--out=x'])
    expect(call).toEqual({ words: ['a', 'b'], options: { size: '3', fast: true, json: true, out: 'x' } })
  })
  it('may give an option a negative number', () => {
    expect(parseCall(verb, ['--size', '-50']).options.size).toBe('-50')
    expect(parseCall(verb, ['--size', '-.5']).options.size).toBe('-.5')
  })
  it('takes what follows -- as words', () => {
    expect(parseCall(verb, ['--', '--size', '-5']).words).toEqual(['--size', '-5'])
  })
  it.each([
    [['--colour'], "Unknown option '--colour'"],
    [['-x'], "Unknown option '-x'"],
    [['--size'], "Option '--size <value>' argument missing"],
    [['--fast=1'], "Option '--fast' does not take an argument"],
    [['--size', '1', '--size', '2'], '--size is given twice'],
    [['--size', '--fast'], "Option '--size' argument is ambiguous"],
  ])('refuses %j', (words, message) => {
    expect(() => parseCall(verb, words)).toThrow(message)
  })
})

describe('words', () => {
  it('are as many as are asked for', () => {
    const call = { words: ['a'], options: {} }
    expect(wordsOf(call, 'SCAN')).toEqual(['a'])
    expect(() => wordsOf(call, 'AGE', 'SIGMA')).toThrow('SIGMA is missing')
    expect(() => wordsOf(call)).toThrow('"a" is one argument too many')
  })
})

describe('numbers', () => {
  it.each([
    ['12', 12],
    ['-0.5', -0.5],
    ['.5', 0.5],
    ['1e-3', 0.001],
    ['+7.', 7],
  ])('%s is %d', (text, value) => {
    expect(numberFrom('x', text)).toBe(value)
  })
  it.each(['NaN', 'Infinity', '1,5', '0x10', '1 2', '--', 'e5', '1e999'])('%s is none', (text) => {
    expect(() => numberFrom('x', text)).toThrow(/^x must be a (finite )?number; it is /)
  })
  it('may be absent, but not empty', () => {
    expect(numberOption({}, 'size')).toBe(null)
    expect(() => numberOption({ size: '' }, 'size')).toThrow('--size needs a value')
  })
})

describe('a path', () => {
  it('is points apart by spaces', () => {
    expect(pathOption({ path: ' 0,1.5  2,3 4,5' }, 'path')).toEqual([
      { x: 0, y: 1.5 },
      { x: 2, y: 3 },
      { x: 4, y: 5 },
    ])
  })
  it.each([
    ['1,2', '--path must have at least two points, "x0,y0 x1,y1", young end first; it is "1,2"'],
    ['1,2 3', 'point 2 of --path must be "x,y"; it is "3"'],
    ['1,2 3,4,5', 'point 2 of --path must be "x,y"; it is "3,4,5"'],
    ['1,2 3,NaN', 'y of point 2 of --path must be a number; it is "NaN"'],
    ['1,2 ,4', 'x of point 2 of --path must be a number; it is ""'],
  ])('refuses %j', (path, message) => {
    expect(() => pathOption({ path }, 'path')).toThrow(message)
  })
})

describe('an orientation', () => {
  it('says where the young end lies', () => {
    expect(orientationOption({ orientation: 'young-right' }, 'orientation')).toEqual({ axis: 'x', young: 'high' })
    expect(() => orientationOption({ orientation: 'constructor' }, 'orientation')).toThrow(
      '--orientation must be one of young-left, young-right, young-up, young-down; it is "constructor"',
    )
  })
})
