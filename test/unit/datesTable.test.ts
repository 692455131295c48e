import { describe, expect, it } from 'vitest'
import { readDatesTable } from '../../worker/core/datesTable.ts'
import { readLayerTable } from '../../worker/core/layerTable.ts'
import { refuseRows } from '../../worker/core/rowProblems.ts'

const header = 'id,kind,top_mm,base_mm,value,sigma,offset,offset_sigma'
const problemsOf = (...rows: string[]) =>
  readDatesTable(`${header}\n${rows.join('\n')}\n`, 'dates.csv').problems.map(
    ({ line, message }) => `${line}: ${message}`,
  )

describe('a table of dates', () => {
  it('is read with its defaults: base is top, offsets are 0', () => {
    const { rows, problems } = readDatesTable(
      'id,kind,top_mm,value,sigma\nA,c14,12.5,4500,30\nB,year,20,-43,0\n',
      'dates.csv',
    )
    expect(problems).toEqual([])
    expect(rows).toEqual([
      { line: 2, id: 'A', kind: 'c14', top: 12.5, base: 12.5, value: 4500, sigma: 30, offset: 0, offsetSigma: 0 },
      { line: 3, id: 'B', kind: 'year', top: 20, base: 20, value: -43, sigma: 0, offset: 0, offsetSigma: 0 },
    ])
  })

  it('may name shape, model and curve', () => {
    const text = `${header},shape,model,curve\nA,year,1,1,1600,5,0,0,uniform,,\nB,c14,2,2,300,20,0,0,,mixture,marine\n`
    const { rows, problems } = readDatesTable(text, 'dates.csv')
    expect(problems).toEqual([])
    expect(rows[0].shape).toBe('uniform')
    expect(rows[1]).toMatchObject({ model: { kind: 'mixture', prior: 0.05, inflation: 10 }, curve: 'marine' })
  })

  it.each([
    ['A,c14,1,2,4500,,0,0', '2: sigma is missing'],
    ['A,c14,1,2,4500,-30,0,0', '2: sigma must not be negative; it is -30'],
    ['A,c14,1,2,4500,0,0,0', '2: sigma of a c14 date must be greater than 0'],
    ['A,c14,9,2,4500,30,0,0', '2: top_mm 9 lies below base_mm 2; are they swapped?'],
    ['A,c14,1,2,4500 BP,30,0,0', '2: value must be a number; it is "4500 BP"'],
    ['A,c14,one,2,4500,30,0,0', '2: top_mm must be a number; it is "one"'],
    ['A,c14,1,2,NaN,30,0,0', '2: value must be a number; it is "NaN"'],
    ['A,c14,1,2,1e999,30,0,0', '2: value must be a number; it is "1e999"'],
    ['A,c14,1,2,0x10,30,0,0', '2: value must be a number; it is "0x10"'],
    ['A,C14,1,2,4500,30,0,0', '2: kind must be one of year, c14, f14c; it is "C14"'],
    [',c14,1,2,4500,30,0,0', '2: id is missing'],
    ['A,c14,1,2,4500,30,0,-1', '2: offset_sigma must not be negative; it is -1'],
    ['A,f14c,1,2,-0.1,0.01,0,0', '2: value of an f14c date must be greater than 0; it is -0.1'],
  ])('names what is wrong with "%s"', (row, message) => expect(problemsOf(row)).toEqual([message]))

  it('names every bad row and keeps the good ones', () => {
    const text = `${header}\nA,c14,1,2,4500,30,0,0\nB,c14,3,4,4500,,0,0\nA,c14,5,6,4500,30,0,0\nC,year,x,7,y,1,0,0\n`
    const { rows, problems } = readDatesTable(text, 'dates.csv')
    expect(rows.map(({ id }) => id)).toEqual(['A'])
    expect(problems).toEqual([
      { line: 3, column: 'sigma', message: 'sigma is missing' },
      { line: 4, column: 'id', message: 'the id "A" stands already in line 2' },
      { line: 5, column: 'top_mm', message: 'top_mm must be a number; it is "x"' },
      { line: 5, column: 'value', message: 'value must be a number; it is "y"' },
    ])
    expect(() => refuseRows('dates.csv', problems)).toThrow(
      'dates.csv, line 3: sigma is missing; line 4: the id "A" stands already in line 2; line 5: top_mm must be a number; it is "x"; line 5: value must be a number; it is "y"; nothing was changed',
    )
  })

  it('without a column it needs is no table of dates', () => {
    expect(() => readDatesTable('id,kind,top_mm,value\nA,c14,1,4500\n', 'dates.csv')).toThrow(
      'dates.csv has no column sigma; its columns are id, kind, top_mm, value',
    )
    const words = `${header},shape,model\nA,c14,1,2,4500,30,0,0,uniform,robust\n`
    expect(readDatesTable(words, 'dates.csv').problems.map(({ message }) => message)).toEqual([
      'shape must be normal, or uniform for a year; it is "uniform"',
      'model must be normal, student-t or mixture; it is "robust"',
    ])
  })
})

describe('a table of layers', () => {
  const layerHeader = 'layer,boundary_px,depth_mm,thickness_mm,probability,kind'

  it('is read as the count writes it; unseen thicknesses are empty', () => {
    const text = `${layerHeader}\n1,3,0.15,0.8,0.99,varve\n2,9,0.95,,0.7,unreadable\n3,20,1.5,5,1,event\n4,90,2.9,,0.5,varve\n`
    const { layers, names, problems } = readLayerTable(text, 'layers.csv')
    expect(problems).toEqual([])
    expect(names).toEqual(['1', '2', '3', '4'])
    expect([...layers.depth]).toEqual([0.15, 0.95, 1.5, 2.9])
    expect([...layers.thickness]).toEqual([0.8, NaN, 5, NaN])
    expect([...layers.kind]).toEqual([0, 1, 2, 0])
  })

  it('names every bad row', () => {
    const text = `${layerHeader}\n1,3,2,-1,0.99,varve\n2,9,1,1,1.4,varve\n3,20,,5,1,varve\n4,90,5,1,,lamina\n`
    expect(readLayerTable(text, 'layers.csv').problems.map(({ line, message }) => `${line}: ${message}`)).toEqual([
      '2: thickness_mm must not be negative; it is -1',
      '3: layers must be sorted downcore; 1 mm follows 2 mm',
      '3: probability must lie between 0 and 1; it is 1.4',
      '4: depth_mm is missing',
      '5: kind must be one of varve, unreadable, event, hiatus; it is "lamina"',
      '5: probability is missing',
    ])
  })
})
