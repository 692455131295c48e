import { describe, expect, it } from 'vitest'
import { paintAgeError, paintConfidence } from '../../../src/view/strip/confidence.ts'
import { densityRows, eachRow, fullDensity } from '../../../src/view/strip/columns.ts'
import { paintCompare } from '../../../src/view/strip/compare.ts'
import type { LadderData, MarkColumn } from '../../../src/view/strip/data.ts'
import { paintLadder } from '../../../src/view/strip/ladder.ts'
import { paintOverview } from '../../../src/view/strip/overview.ts'
import { paintScanMarks } from '../../../src/view/strip/scanMarks.ts'
import { paintTransect } from '../../../src/view/strip/transect.ts'
import { yearNumbers } from '../../../src/view/strip/yearNumbers.ts'
import { darkTheme, lightTheme } from '../../../src/view/theme.ts'
import { trueAcross } from '../../../src/view/tiles.ts'
import { fit, pan, show, toScreen } from '../../../src/view/viewport.ts'
import { seededRandom } from '../../../worker/random.ts'
import { overlaps, RecordingSurface } from './recordingSurface.ts'

const frame = { x: 0, y: 0, width: 120, height: 600 }
const length = 10_000

/** Boundaries about 20 px apart over the whole core, all certain but where said otherwise. */
function column(count = 490, doubtful: number[] = [], rejected: number[] = []): MarkColumn {
  const random = seededRandom(3)
  const spacing = (length - 100) / count
  const position = Float64Array.from({ length: count }, (_, i) => 50 + (i + 0.6 * random.uniform()) * spacing)
  const mark = Uint8Array.from({ length: count }, (_, i) => (rejected.includes(i) ? 2 : doubtful.includes(i) ? 1 : 0))
  return { position, mark }
}

function ladderData(boundaries: MarkColumn, more: Partial<LadderData> = {}): LadderData {
  const years = Float64Array.from(boundaries.position, (_, i) => i + 1)
  return {
    viewport: fit(length, 600),
    boundaries,
    proposals: null,
    spans: [],
    years,
    cursor: null,
    selected: null,
    selectedSpan: null,
    checkedTo: null,
    ...more,
  }
}

function draw(data: LadderData, theme = lightTheme): RecordingSurface {
  const surface = new RecordingSurface()
  paintLadder(surface, frame, data, theme)
  return surface
}

/** Level lines of one part of a drawing: y of each and how many pieces it is made of. */
function piecesByHeight(surface: RecordingSurface, group: string): Map<number, number> {
  const pieces = new Map<number, number>()
  for (const { ends, group: of } of surface.segments) {
    if (of !== group) continue
    for (let i = 0; i < ends.length; i += 4) pieces.set(ends[i + 1], (pieces.get(ends[i + 1]) ?? 0) + 1)
  }
  return pieces
}

describe('the ladder', () => {
  const boundaries = column(490, [101], [103])
  const viewport = show(fit(length, 600), boundaries.position[98] - 1, boundaries.position[106] + 1)
  const y = (i: number) => toScreen(viewport, boundaries.position[i])

  it('draws certain boundaries whole, doubtful ones broken, rejected ones as a cross', () => {
    const surface = draw(ladderData(boundaries, { viewport }))
    const pieces = piecesByHeight(surface, 'boundaries')
    expect(pieces.get(y(100))).toBe(1)
    expect(pieces.get(y(101))).toBe(2)
    expect(pieces.get(y(103))).toBe(undefined)
    expect(surface.markers.filter(({ shape }) => shape === 'cross').map((marker) => marker.y)).toEqual([y(103)])
  })

  it('draws proposals as open rungs, longer the more probable', () => {
    const position = boundaries.position.slice(98, 102)
    const proposals = { position, probability: Float64Array.of(0.2, 0.9, 0.5, 1), chosen: Uint8Array.of(0, 1, 0, 1) }
    const surface = draw(ladderData(column(0), { viewport, proposals }))
    const reach = Array.from(position, (at) => {
      const line = toScreen(viewport, at) - 2
      const ends = surface.segments.filter(({ group }) => group === 'proposals').flatMap((one) => one.ends)
      let most = 0
      for (let i = 0; i < ends.length; i += 4) if (ends[i + 1] === line) most = Math.max(most, ends[i + 2])
      return most
    })
    expect(reach[0]).toBeLessThan(reach[2])
    expect(reach[2]).toBeLessThan(reach[1])
    expect(reach[1]).toBeLessThan(reach[3])
  })

  it('uses the accent only for what is selected and for the cursor', () => {
    const accents = (surface: RecordingSurface) =>
      surface.segments.filter(({ stroke }) => stroke.colour === lightTheme.accent).length
    expect(accents(draw(ladderData(boundaries, { viewport })))).toBe(0)
    const selected = new Uint8Array(490)
    selected[100] = 1
    const chosen = draw(ladderData(boundaries, { viewport, selected }))
    const lines = chosen.segments.filter(({ stroke }) => stroke.colour === lightTheme.accent)
    expect(lines.flatMap(({ ends }) => ends[1])).toEqual([y(100)])
    const cursor = draw(ladderData(boundaries, { viewport, cursor: boundaries.position[102] }))
    expect(cursor.markers.filter(({ shape }) => shape === 'left').map((marker) => marker.y)).toEqual([y(102)])
  })

  it('draws each kind of span in its own texture, and names it where there is room', () => {
    const [a, b, c, d] = [99, 100, 102, 105].map((i) => boundaries.position[i])
    const spans = [
      { from: a, to: b, kind: 'event' as const },
      { from: b, to: c, kind: 'unreadable' as const },
      { from: d, to: d + 0.1, kind: 'hiatus' as const },
    ]
    const surface = draw(ladderData(column(0), { viewport, spans, selectedSpan: 1 }))
    expect(surface.textures.map(({ texture }) => texture)).toEqual(['hatch', 'stipple', 'rule'])
    expect(surface.textures.map(({ colour }) => colour === lightTheme.accent)).toEqual([false, true, false])
    expect(surface.texts.map(({ text }) => text)).toEqual(['event bed', 'unreadable'])
  })

  it('has the same parts in the light and in the dark', () => {
    const shape = (surface: RecordingSurface) => ({
      groups: surface.groups,
      segments: surface.segments.map(({ ends }) => ends),
      texts: surface.texts,
    })
    expect(shape(draw(ladderData(boundaries, { viewport }), darkTheme))).toEqual(
      shape(draw(ladderData(boundaries, { viewport }))),
    )
  })

  it('draws its parts in order, the cursor and the years on top', () => {
    expect(draw(ladderData(boundaries, { viewport })).groups).toEqual(['spans', 'boundaries', 'cursor', 'years'])
  })

  it('marks with a solid rail how far the counter has looked', () => {
    const checkedTo = boundaries.position[102]
    const rails = draw(ladderData(boundaries, { viewport, checkedTo })).segments.filter(
      ({ ends }) => ends[0] === ends[2],
    )
    expect(rails.map(({ stroke }) => stroke.dash === undefined)).toEqual([true, false])
    expect(rails[0].ends[3]).toBe(y(102))
  })
})

describe('20,000 boundaries', () => {
  const many = column(20_000)

  it('are drawn as at most one mark in each device row, from any distance', () => {
    for (const [from, to] of [
      [0, length],
      [3000, 6000],
      [5000, 5400],
    ]) {
      const viewport = show(fit(length, 600), from, to)
      const rows: number[] = []
      eachRow(viewport, many.position, 2, (_, y) => rows.push(Math.floor(y * 2)))
      expect(new Set(rows).size).toBe(rows.length)
      expect(rows.length).toBeGreaterThan(100)
      expect(rows.length).toBeLessThanOrEqual(1200 + 8)
    }
  })

  it('lose none where there is room for all', () => {
    const viewport = show(fit(length, 600), 5000, 5040)
    const seen: number[] = []
    eachRow(viewport, many.position, 1, (i) => seen.push(i))
    const inside = Array.from(many.position.keys()).filter((i) => {
      const y = toScreen(viewport, many.position[i])
      return y >= 0 && y < 600
    })
    expect(inside.every((i) => seen.includes(i))).toBe(true)
    expect(inside.length).toBeGreaterThan(60)
  })

  it('turn into a density in the ladder, with every row that holds a doubtful one marked', () => {
    const surface = draw(ladderData(column(20_000, [4000, 12_000])))
    const marked = surface.segments.at(-1)
    expect(surface.segments.filter(({ group }) => group === 'boundaries').length).toBe(2)
    const doubts = surface.segments.filter(({ group }) => group === 'boundaries')[1].ends
    expect(doubts.length / 4).toBe(2)
    expect(marked).toBeDefined()
  })

  it('have a density that adds up to their number', () => {
    const viewport = fit(length, 600)
    const rows = densityRows(viewport, many.position, 1000, 1)
    const total = rows.reduce((sum, row) => sum + row * 1000, 0)
    expect(Math.abs(total / 20_000 - 1)).toBeLessThan(0.02)
    expect(Math.max(...densityRows(viewport, many.position, fullDensity(viewport, many.position), 1))).toBeLessThan(0.6)
  })
})

describe('year numbers', () => {
  it('never overlap and never leave the view, at any zoom and place', () => {
    for (const count of [40, 490, 20_000]) {
      const boundaries = column(count)
      let viewport = fit(length, 600)
      for (let step = 0; step < 25; step++) {
        viewport = pan({ ...viewport, scale: viewport.scale * 1.3 }, 137)
        const surface = draw(ladderData(boundaries, { viewport }))
        expect(overlaps(surface.texts)).toEqual([])
        expect(surface.texts.every(({ y, height }) => y >= 0 && y + height <= 600)).toBe(true)
      }
    }
  })

  it('are round from afar', () => {
    const boundaries = column(20_000)
    const texts = draw(ladderData(boundaries)).texts.map(({ text }) => Number(text.replace('\u202f', '')))
    expect(texts.length).toBeGreaterThan(15)
    expect(texts.every((year) => year % 500 === 0)).toBe(true)
  })

  it('stay at their boundaries while the core scrolls', () => {
    const { position } = column(490)
    const years = Float64Array.from(position, (_, i) => i + 1)
    const start = show(fit(length, 600), 3000, 5000)
    const shown = (dy: number) => new Set(yearNumbers(pan(start, dy), position, years, 15, -1).map(({ year }) => year))
    const before = shown(0)
    const after = shown(40)
    // All numbers that were well inside before are still there.
    const inside = [...before].filter((year) => toScreen(start, position[year - 1]) > 60)
    expect(inside.length).toBeGreaterThan(10)
    expect(inside.every((year) => after.has(year))).toBe(true)
  })

  it('always include the one at the cursor', () => {
    const { position } = column(490)
    const years = Float64Array.from(position, (_, i) => i + 1)
    const view = show(fit(length, 600), 3000, 8000)
    for (let i = 160; i < 170; i++) {
      expect(yearNumbers(view, position, years, 15, i).some(({ index }) => index === i)).toBe(true)
    }
  })

  it('are not given to boundaries without one', () => {
    const { position } = column(20)
    const years = new Float64Array(20).fill(NaN)
    years[3] = -44
    const view = fit(length, 600)
    expect(yearNumbers(view, position, years, 15, -1).map(({ year }) => year)).toEqual([-44])
  })
})

describe('marks on the sediment', () => {
  const boundaries = column(490, [101], [102])
  const viewport = show(fit(length, 600), 1900, 2300)
  const transect = {
    points: [
      { axis: 0, across: 300 },
      { axis: length, across: 300 },
    ],
    width: 60,
  }
  const across = trueAcross(viewport, 600, 260, 300)
  const data = { viewport, across, transect, boundaries, proposals: null, spans: [], cursor: null }
  const bare = (surface: RecordingSurface) =>
    surface.segments.filter(({ stroke }) => (stroke.opacity ?? 1) > 0.5).flatMap(({ ends }) => ends)

  it('leave the band itself free', () => {
    const surface = new RecordingSurface()
    paintScanMarks(surface, { ...frame, width: 260 }, data, lightTheme)
    const half = 30 * viewport.scale
    const ends = bare(surface)
    expect(ends.length).toBeGreaterThan(100)
    for (let i = 0; i < ends.length; i += 4) {
      const [least, most] = [Math.min(ends[i], ends[i + 2]), Math.max(ends[i], ends[i + 2])]
      expect(most <= 130 - half || least >= 130 + half).toBe(true)
    }
  })

  it('slope with the laminae, about the middle of the band', () => {
    const surface = new RecordingSurface()
    paintScanMarks(surface, { ...frame, width: 260 }, { ...data, slopeAt: () => 0.1 }, lightTheme)
    const ends = bare(surface)
    const [left, right] = [ends[1], ends[5]]
    expect(right - left).toBeCloseTo(0.1 * 60 * viewport.scale, 6)
  })

  it('stay inside the column where the band is wider than it', () => {
    const near = show(fit(length, 600), 2000, 2040)
    const surface = new RecordingSurface()
    const wide = { ...data, viewport: near, across: trueAcross(near, 600, 260, 300) }
    paintScanMarks(surface, { ...frame, width: 260 }, wide, lightTheme)
    const ends = bare(surface)
    expect(ends.length).toBeGreaterThan(0)
    for (let i = 0; i < ends.length; i += 2) expect(ends[i] >= 0 && ends[i] <= 260).toBe(true)
  })

  it('are left away from afar, where they would cover it', () => {
    const surface = new RecordingSurface()
    const far = fit(length, 600)
    paintScanMarks(surface, frame, { ...data, viewport: far, across: trueAcross(far, 600, 260, 300) }, lightTheme)
    expect(surface.segments).toEqual([])
  })

  it('draw the cursor alone across the band', () => {
    const surface = new RecordingSurface()
    paintScanMarks(surface, { ...frame, width: 260 }, { ...data, boundaries: null, cursor: 2100 }, lightTheme)
    const last = surface.segments.at(-1)
    expect(last?.stroke.colour).toBe(lightTheme.overScan.accent)
    expect(last?.ends[0]).toBeCloseTo(130 - 30 * viewport.scale, 6)
    expect(last?.ends[2]).toBeCloseTo(130 + 30 * viewport.scale, 6)
  })
})

describe('the transect on the sediment', () => {
  const transect = {
    points: [
      { axis: 0, across: 300 },
      { axis: 5000, across: 320 },
      { axis: length, across: 300 },
    ],
    width: 100,
  }
  const viewport = show(fit(length, 600), 4000, 6000)
  const data = { viewport, across: trueAcross(viewport, 600, 260, 300), transect, editable: false, active: null }

  it('shows handles only while it is edited, the active one in the accent', () => {
    const quiet = new RecordingSurface()
    paintTransect(quiet, { ...frame, width: 260 }, data, lightTheme)
    expect(quiet.markers).toEqual([])
    const busy = new RecordingSurface()
    paintTransect(
      busy,
      { ...frame, width: 260 },
      { ...data, editable: true, active: { kind: 'point', index: 1 } },
      lightTheme,
    )
    expect(busy.markers.filter(({ shape }) => shape === 'circle').length).toBe(3)
    expect(busy.markers.filter(({ shape }) => shape === 'square').length).toBe(4)
    const active = busy.markers.filter(({ paint }) => paint.fill === lightTheme.overScan.accent)
    expect(active.map(({ y }) => y)).toEqual([toScreen(viewport, 5000)])
  })

  it('draws no farther than the window, however far it is magnified', () => {
    const near = { ...viewport, scale: 12, top: 2500 }
    const surface = new RecordingSurface()
    paintTransect(surface, { ...frame, width: 260 }, { ...data, viewport: near, editable: true }, lightTheme)
    const ys = surface.polylines.flatMap(({ points }) =>
      points.filter((_, i) => i % 2 === 1 && !Number.isNaN(points[i])),
    )
    expect(ys.length).toBeGreaterThan(0)
    expect(Math.min(...ys)).toBeGreaterThanOrEqual(-8)
    expect(Math.max(...ys)).toBeLessThanOrEqual(608)
  })
})

describe('the columns beside', () => {
  const boundaries = column(490)
  const viewport = show(fit(length, 600), 3000, 3400)

  it('show each probability as a pin, hollow below one half', () => {
    const position = Float64Array.of(3100, 3200)
    const surface = new RecordingSurface()
    const data = { viewport, position, probability: Float64Array.of(0.3, 0.9), cursor: null }
    paintConfidence(surface, { ...frame, width: 66 }, data, lightTheme)
    expect(surface.markers.map(({ paint }) => paint.fill === lightTheme.ink)).toEqual([false, true])
    expect(surface.markers.map(({ x }) => Math.round(x))).toEqual([21, 57])
  })

  it('show from afar what is in doubt in each row: likely boundaries that lack, unlikely ones that might be', () => {
    const { position } = column(20_000)
    const probability = new Float64Array(20_000).fill(1)
    probability[8000] = 0.6
    probability[12_000] = 0.3
    const surface = new RecordingSurface()
    const viewport = fit(length, 600)
    paintConfidence(surface, { ...frame, width: 106 }, { viewport, position, probability, cursor: null }, lightTheme)
    const doubts = surface.segments.filter(({ stroke }) => stroke.colour === lightTheme.bandNarrow)
    const rounded = doubts.flatMap(({ ends }) => ends.map((end) => Math.round(end)))
    const row = (i: number) => Math.round(Math.floor(toScreen(viewport, position[i])) + 0.5)
    expect(rounded).toEqual([63, row(8000), 103, row(8000), 3, row(12_000), 33, row(12_000)])
  })

  it('widen the error downcore, also between two boundaries that lie out of view', () => {
    const position = Float64Array.of(0, 10_000)
    const surface = new RecordingSurface()
    const data = { viewport, position, younger: Float64Array.of(0, 10), older: Float64Array.of(0, 20), limit: null }
    paintAgeError(surface, { ...frame, width: 82 }, data, lightTheme)
    const { points } = surface.polygons[0]
    expect(points.length).toBe(8)
    expect(Math.min(...points.filter((_, i) => i % 2 === 0))).toBeCloseTo(41 - 20, 6)
    expect(Math.max(...points.filter((_, i) => i % 2 === 0))).toBeCloseTo(41 + 40, 6)
  })

  it('point out where counters disagree: filled where one saw none, open where one doubted', () => {
    const view = show(fit(length, 600), boundaries.position[100] - 5, boundaries.position[102] + 5)
    const position = boundaries.position.slice(100, 103)
    const own = Float64Array.from([0, 1, 2].flatMap((i) => [position[i], i === 1 ? NaN : position[i] + 1]))
    const label = Uint8Array.of(2, 2, 2, 0, 1, 2)
    const counters = ['A', 'B'].map((name) => ({ name, column: { position, mark: new Uint8Array(3) } }))
    const surface = new RecordingSurface()
    paintCompare(
      surface,
      frame,
      { viewport: view, counters, sites: { position, own, label }, cursor: null },
      lightTheme,
    )
    const pointers = surface.markers.filter(({ shape }) => shape === 'left')
    expect(pointers.map(({ y }) => y)).toEqual([toScreen(view, position[1]), toScreen(view, position[2])])
    expect(pointers.map(({ paint }) => paint.fill !== undefined)).toEqual([true, false])
    expect(surface.markers.filter(({ shape }) => shape === 'circle').length).toBe(1)
  })

  it('never let an agreement hide a disagreement from afar', () => {
    const count = 20_000
    const { position } = column(count)
    const label = new Uint8Array(2 * count).fill(2)
    label[2 * 7777] = 0
    const own = Float64Array.from({ length: 2 * count }, (_, i) => position[i >> 1])
    const counters = ['A', 'B'].map((name) => ({ name, column: { position, mark: new Uint8Array(count) } }))
    const surface = new RecordingSurface()
    const viewport = fit(length, 600)
    paintCompare(surface, frame, { viewport, counters, sites: { position, own, label }, cursor: null }, lightTheme)
    const missed = surface.segments.filter(({ stroke }) => stroke.colour === lightTheme.ink)
    expect(missed.length).toBe(1)
    expect(Math.abs(missed[0].ends[1] - toScreen(viewport, position[7777]))).toBeLessThanOrEqual(1)
  })

  it('frame the window in the overview, large enough to be grasped at any magnification', () => {
    const surface = new RecordingSurface()
    const data = {
      viewport: show(fit(length, 600), 5000, 5010),
      grid: null,
      tile: () => undefined,
      checked: [{ from: 0, to: 2500 }],
      spans: [],
      boundaries,
      cursor: null,
    }
    paintOverview(surface, { ...frame, width: 46 }, data, lightTheme)
    const window = surface.rects.find(({ paint }) => paint.stroke !== undefined)
    expect(window?.frame.height).toBe(6)
    const checked = surface.segments.find(({ stroke }) => stroke.width === 3)
    expect(checked?.ends[1]).toBeCloseTo(14, 6)
    expect(checked?.ends[3]).toBeCloseTo(14 + 572 / 4, 6)
  })
})
