import { describe, expect, it } from 'vitest'
import { exportSvg } from '../../../src/view/exportPlot.ts'
import { paintAgeDepth } from '../../../src/view/plots/ageDepth.ts'
import { paintAgreement } from '../../../src/view/plots/agreement.ts'
import { yearAxis, yearTicksCE } from '../../../src/view/plots/calendars.ts'
import type { AgeDepthData, Calendar } from '../../../src/view/plots/data.ts'
import { decimate } from '../../../src/view/plots/decimate.ts'
import { paintDifferences } from '../../../src/view/plots/differences.ts'
import { paintHistogram } from '../../../src/view/plots/histogram.ts'
import { paintThickness } from '../../../src/view/plots/thickness.ts'
import type { Painter } from '../../../src/view/surface.ts'
import { lightTheme, printTheme } from '../../../src/view/theme.ts'
import { seededRandom } from '../../../worker/random.ts'
import { outside, overlaps, RecordingSurface } from './recordingSurface.ts'
import { elementsOf } from './wellFormed.ts'

const columnOf = (count: number, value: (i: number) => number) =>
  Float64Array.from({ length: count }, (_, i) => value(i))

function ageDepth(count: number, calendar: Calendar = 'varve'): AgeDepthData {
  const year = (age: number) =>
    calendar === 'CE' ? 2019 - age : calendar === 'cal BP' ? age - 69 : calendar === 'b2k' ? age - 19 : age
  const depth = columnOf(count, (i) => i * 0.9 + Math.sin(i / 9))
  const hill = (middle: number) => ({
    years: columnOf(81, (i) => year(middle + (i - 40) * 4)),
    density: columnOf(81, (i) => Math.exp(-0.5 * ((i - 40) / 10) ** 2)),
  })
  return {
    calendar,
    depth,
    central: columnOf(count, (i) => year(i + 1)),
    centralName: 'Posterior mean',
    band68: {
      low: columnOf(count, (i) => year(i + 1) - 0.02 * i),
      high: columnOf(count, (i) => year(i + 1) + 0.02 * i),
    },
    band95: {
      low: columnOf(count, (i) => year(i + 1) - 0.04 * i),
      high: columnOf(count, (i) => year(i + 1) + 0.04 * i),
    },
    counters: ['Counter A', 'Counter B', 'Counter C'].map((name, k) => ({
      name,
      depth,
      years: columnOf(count, (i) => year((i + 1) * (1 + 0.01 * k))),
    })),
    dates: [
      {
        id: 'grey tephra',
        depthFrom: 100,
        depthTo: 101,
        years: Float64Array.of(year(115)),
        density: Float64Array.of(1),
        doubtful: false,
      },
      { id: 'ASK-11', depthFrom: 0.5 * count, depthTo: 0.5 * count + 3, ...hill(0.55 * count), doubtful: false },
      { id: 'ASK-12', depthFrom: 0.5 * count + 4, depthTo: 0.5 * count + 6, ...hill(0.56 * count), doubtful: false },
      { id: 'ASK-14', depthFrom: 0.8 * count, depthTo: 0.8 * count + 6, ...hill(0.6 * count), doubtful: true },
    ],
    spans: [{ from: 200, to: 212, kind: 'event' }],
    depthUnit: 'cm',
    caption:
      'Age against depth of the invented core ASK19-1. Hills: radiocarbon dates by themselves; broken: in doubt.',
  }
}

const random = seededRandom(11)
const thickness = columnOf(900, () => Math.exp(0.4 * random.normal()))
const depths = ['A', 'B', 'C'].map(() => columnOf(400, (i) => i + 0.3 * random.uniform()))

type Case = [name: string, draw: (surface: RecordingSurface, width: number, height: number) => void, svg: () => string]

function caseOf<Data>(name: string, painter: Painter<Data>, data: Data): Case {
  return [
    name,
    (surface, width, height) => painter(surface, { x: 5, y: 7, width, height }, data, lightTheme),
    () => exportSvg(painter, data, { width: 120, height: 90 }, { title: name }),
  ]
}

const cases: Case[] = [
  ...(['varve', 'CE', 'cal BP', 'b2k'] as const).map((calendar) =>
    caseOf(`age against depth, ${calendar}`, paintAgeDepth, ageDepth(500, calendar)),
  ),
  caseOf('age against depth, back to the ice age', paintAgeDepth, ageDepth(13_000, 'CE')),
  caseOf('thickness', paintThickness, {
    calendar: 'CE',
    year: columnOf(900, (i) => 2019 - i),
    thickness,
    mean: columnOf(900, () => 1),
    meanYears: 31,
    band: { low: columnOf(900, () => 0.8), high: columnOf(900, (i) => (i === 400 ? NaN : 1.2)) },
    caption: 'Thickness of each year.',
  }),
  caseOf('thickness of a few years', paintThickness, {
    calendar: 'varve',
    year: columnOf(40, (i) => i + 1),
    thickness: thickness.slice(0, 40),
    mean: null,
    meanYears: 0,
    band: null,
  }),
  caseOf('differences of counts', paintDifferences, {
    counters: depths.map((depth, k) => ({
      name: `Counter ${'ABC'[k]}`,
      depth,
      difference: columnOf(400, (i) => ((k - 1) * i) / 60),
    })),
    band: {
      depth: depths[0],
      low: columnOf(400, (i) => -i / 30),
      high: columnOf(400, (i) => i / 30),
      name: 'counting error',
    },
    horizons: [10, 12, 200, 390].map((depth, i) => ({ depth, name: `horizon ${i + 1}` })),
    depthUnit: 'mm',
  }),
  caseOf('agreement', paintAgreement, {
    counters: depths.map((depth, k) => ({
      name: 'ABC'[k],
      depth,
      mark: columnOf(400, (i) => (i % 17 === k ? 1 : 0)) as unknown as Uint8Array,
    })),
    sites: {
      depth: depths[0],
      own: columnOf(1200, (i) => (i % 29 === 0 ? NaN : depths[i % 3][Math.floor(i / 3)])),
      label: Uint8Array.from({ length: 1200 }, (_, i) => (i % 29 === 0 ? 0 : i % 13 === 0 ? 1 : 2)),
    },
    from: 100,
    to: 140,
    depthUnit: 'mm',
  }),
  caseOf('histogram', paintHistogram, {
    edges: columnOf(21, (i) => i * 0.2),
    count: columnOf(20, (i) => Math.round(100 * Math.exp(-((i - 6) ** 2) / 12))),
    title: 'Varve thickness',
    unit: 'mm',
    countTitle: 'Number of layers',
    marks: [
      { value: 1.2, name: 'median 1.20' },
      { value: 1.3, name: 'mean 1.30' },
    ],
  }),
]

describe.each(cases)('the plot of %s', (_, draw, svg) => {
  it('sets no text over another and none outside of its frame, at any size', () => {
    for (const [width, height] of [
      [760, 520],
      [420, 480],
      [340, 260],
      [1400, 900],
    ]) {
      const surface = new RecordingSurface()
      draw(surface, width, height)
      expect(overlaps(surface.texts)).toEqual([])
      expect(outside(surface.texts, { x: 5, y: 7, width, height })).toEqual([])
    }
  })

  it('names both axes', () => {
    const surface = new RecordingSurface()
    draw(surface, 700, 500)
    const titles = surface.texts.map(({ text }) => text)
    expect(titles.some((title) => /^(Depth|Varve thickness|Number of layers)/.test(title))).toBe(true)
    expect(surface.groups).toContain('axes')
  })

  it('is well-formed SVG, drawn without a page', () => {
    const names = elementsOf(svg())
    expect(names[0]).toBe('svg')
    expect(names.filter((name) => name === 'text').length).toBeGreaterThan(5)
  })

  it('prints in black, white and grey', () => {
    const colours = svg().match(/#[0-9a-f]{6}/gi) ?? []
    expect(colours.length).toBeGreaterThan(5)
    for (const colour of colours) expect(colour).toMatch(/^#(..)\1\1$/)
  })
})

describe('the parts of a figure', () => {
  it('are grouped by name, so that a drawing program finds them', () => {
    const svg = exportSvg(paintAgeDepth, ageDepth(300), { width: 100, height: 120 })
    const parts = Array.from(svg.matchAll(/data-part="([^"]*)"/g), (match) => match[1])
    expect(parts).toEqual([
      'legend',
      'axes',
      '95 % band',
      '68 % band',
      'counter Counter A',
      'counter Counter B',
      'counter Counter C',
      'central',
      'dates',
    ])
  })

  it('tell counters apart by dash, not by colour', () => {
    const surface = new RecordingSurface()
    paintAgeDepth(surface, { x: 0, y: 0, width: 500, height: 500 }, ageDepth(300), printTheme)
    const lines = surface.polylines.filter(({ group }) => group.startsWith('counter') || group === 'central')
    expect(new Set(lines.map(({ stroke }) => `${String(stroke.dash)} ${stroke.width}`)).size).toBe(4)
  })
})

describe('decimation', () => {
  it('keeps the extremes of every pixel, and the first and the last point', () => {
    const noise = seededRandom(5)
    const along = columnOf(20_000, (i) => i / 40)
    const value = columnOf(20_000, () => noise.normal())
    const points = decimate(along, value, 1, true)
    expect(points.length / 2).toBeLessThanOrEqual(4 * 501)
    for (let pixel = 0; pixel < 500; pixel++) {
      const all = value.slice(pixel * 40, (pixel + 1) * 40)
      const kept = points.filter((_, i) => i % 2 === 1 && Math.floor(points[i - 1]) === pixel)
      expect([Math.min(...kept), Math.max(...kept)]).toEqual([Math.min(...all), Math.max(...all)])
    }
    expect(points.slice(0, 2)).toEqual([along[0], value[0]])
    expect(points.slice(-2)).toEqual([along[19_999], value[19_999]])
  })

  it('changes nothing where points are far apart', () => {
    expect(decimate([0, 10, 20], [1, 5, 3], 1, true)).toEqual([0, 1, 10, 5, 20, 3])
    expect(decimate([20, 10, 0], [1, 5, 3], 1, false)).toEqual([1, 20, 5, 10, 3, 0])
  })

  it('lifts the pen at gaps, also inside of one pixel', () => {
    expect(decimate([0, 0.1, 0.2], [1, NaN, 3], 1, true)).toEqual([0, 1, NaN, NaN, 0.2, 3])
  })

  it('keeps a figure of 20,000 layers small', () => {
    const svg = exportSvg(paintAgeDepth, ageDepth(20_000), { width: 90, height: 120 })
    const vertices = Array.from(svg.matchAll(/ d="([^"]*)"/g), (match) => match[1].split(/[ML]/).length)
    expect(Math.max(...vertices)).toBeLessThan(4 * 480)
    expect(svg.length).toBeLessThan(400_000)
  })
})

describe('the year axis', () => {
  it('knows no year zero', () => {
    expect(yearTicksCE(-250, 250, 6)).toEqual([-199, -99, 1, 100, 200])
    const axis = yearAxis('CE', -250, 250)
    expect(yearTicksCE(-250, 250, 6).map((year) => axis.text?.(year, 100))).toEqual([
      '200 BCE',
      '100 BCE',
      '1 CE',
      '100',
      '200',
    ])
  })
  it('lets older years lie on the side asked for', () => {
    expect(yearAxis('CE', 1600, 2019)).toMatchObject({ start: 1600, end: 2019 })
    expect(yearAxis('CE', 1600, 2019, 'right')).toMatchObject({ start: 2019, end: 1600 })
    expect(yearAxis('cal BP', 0, 400)).toMatchObject({ start: 0, end: 400, unit: 'cal BP' })
    expect(yearAxis('varve', 0, 400, 'left')).toMatchObject({ start: 400, end: 0 })
  })
  it('takes whole years only', () => {
    expect(yearTicksCE(2000, 2003, 10)).toEqual([2000, 2001, 2002, 2003])
  })
})
