import { describe, expect, it } from 'vitest'
import { csvText, numberCell, readCsv, textCell } from '../../worker/core/csv.ts'

describe('number cells', () => {
  it('have fixed decimals, a decimal point and no exponent', () => {
    expect(numberCell(12.3456789, 4)).toBe('12.3457')
    expect(numberCell(1e-7, 4)).toBe('0.0000')
    expect(numberCell(123456789.5, 2)).toBe('123456789.50')
  })
  it('write zero without a sign, whichever side it was rounded from', () => {
    expect(numberCell(-0, 2)).toBe('0.00')
    expect(numberCell(-0.001, 2)).toBe('0.00')
    expect(numberCell(-0.01, 2)).toBe('-0.01')
  })
  it('are empty for what is not known', () => {
    expect(numberCell(NaN, 2)).toBe('')
    expect(numberCell(Infinity, 2)).toBe('')
  })
  it('refuse decimals that are no whole number', () => {
    expect(() => numberCell(1, 1.5)).toThrow('places must be a whole number from 0 to 20; it is 1.5')
  })
})

describe('text cells', () => {
  it.each(['=1+1', '+1', '-1', '@SUM(A1)', ' =1', '\t=1'])('%j cannot be run as a formula', (text) => {
    const { rows } = readCsv(csvText(['a'], [[textCell(text)]]), 'table')
    expect(rows[0][0]).toBe(`'${text}`)
  })
  it('keep commas, quotes and line ends', () => {
    const text = 'a, "b"\nc'
    expect(textCell(text)).toBe('"a, ""b""\nc"')
    expect(readCsv(csvText(['x', 'y'], [[textCell(text), '1']]), 'table').rows).toEqual([[text, '1']])
  })
  it('lose control characters', () => {
    expect(textCell('a\u0000b\u001bc')).toBe('a b c')
  })
})

describe('reading a table', () => {
  it('accepts every line end, a byte order mark, empty lines and a missing last line end', () => {
    for (const end of ['\n', '\r\n', '\r']) {
      const text = `\ufeffdepth_mm,mark${end}1.5,certain${end}${end}2,doubtful`
      expect(readCsv(text, 'counts').rows).toEqual([
        ['1.5', 'certain'],
        ['2', 'doubtful'],
      ])
    }
  })
  it('knows the line on which each row begins, also after line ends inside quotes', () => {
    expect(readCsv('a,b\n"1\n1",2\n\n3,4\n', 't').lines).toEqual([2, 5])
  })
  it('reads empty cells', () => {
    expect(readCsv('a,b\n,\n1,\n', 't').rows).toEqual([
      ['', ''],
      ['1', ''],
    ])
  })
  it.each([
    ['', 't is empty; it must start with a line of column names'],
    ['\n\n', 't is empty; it must start with a line of column names'],
    ['a,a\n', 't has two columns called "a"; rename one of them'],
    ['a,b\n1\n', 't, line 2, has 1 cells; its header has 2 columns'],
    ['a,b\n1,2\n1,2,3\n', 't, line 3, has 3 cells; its header has 2 columns'],
    ['a\n"b\n', 't, line 2, has a quote that is never closed'],
    ['a\n"b"c\n', 't, line 2, has text after a closing quote'],
    ['a\nb"c\n', 't, line 2, has a quote inside a cell that does not start with one'],
  ])('refuses %j', (text, message) => {
    expect(() => readCsv(text, 't')).toThrow(message)
  })
  it('reads a large table without a deep stack', () => {
    const cell = `"${'x""y\n'.repeat(200_000)}"`
    expect(readCsv(`a,b\n${cell},1\n`, 't').rows[0][0]).toHaveLength(4 * 200_000)
  })
})
