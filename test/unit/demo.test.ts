import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { drawRecord, recordSeed } from '../../sample-images/record.ts'
import { truthOf, type Truth } from '../../sample-images/truth.ts'
import type { DemoFacts } from '../../src/document/demoFacts.ts'
import { readCsv } from '../../worker/core/csv.ts'
import { intcal20Nodes } from '../../worker/core/intcal20Nodes.ts'
import { scoreBoundaries } from '../fixtures/scoreLadder.ts'

const read = (name: string) => readFileSync(new URL(`../../sample-images/${name}`, import.meta.url), 'utf8')
const facts = JSON.parse(read('scans/demo.json')) as DemoFacts
const truth = JSON.parse(read('truth/askelmere-1.json')) as Truth

describe('the truth of the demo', () => {
  it('is what its code draws', () => {
    expect(truthOf(drawRecord(recordSeed), truth.scan, truth.width, truth.crack)).toEqual(truth)
  })
  it('holds 400 to 450 years, one after the other downcore, some faint, some doubled, two turbidites and a tephra', () => {
    expect(truth.boundaries.length).toBeGreaterThan(400)
    expect(truth.boundaries.length).toBeLessThan(450)
    for (let i = 1; i < truth.boundaries.length; i++) {
      expect(truth.boundaries[i] - truth.boundaries[i - 1]).toBeGreaterThan(9)
    }
    expect(truth.years).toEqual(truth.boundaries.map((_, i) => truth.coringYear - 1 - i))
    expect(truth.faint.length).toBeGreaterThan(10)
    expect(truth.doubled.length).toBeGreaterThan(8)
    expect(truth.events.map(({ kind }) => kind).sort()).toEqual(['tephra', 'turbidite', 'turbidite'])
  })
})

describe('the three counts of the demo', () => {
  it.each([
    ['A', 0.003, 0.025],
    ['B', 0.006, 0.035],
    ['C', 0.01, 0.05],
  ])('counter %s misses and adds a little, and doubts some', (counter, least, most) => {
    const count = facts.counts.find((one) => one.counter === counter)!
    const { missed, spurious } = scoreBoundaries(truth.boundaries, count.position)
    const years = truth.boundaries.length
    expect((missed.length + spurious.length) / years).toBeGreaterThan(2 * least)
    expect(missed.length / years).toBeLessThan(most)
    expect(spurious.length / years).toBeLessThan(most)
    expect(count.mark.filter((mark) => mark === 'doubtful').length).toBeGreaterThan(5)
    expect(count.mark).toHaveLength(count.position.length)
    expect([...count.position].sort((a, b) => a - b)).toEqual(count.position)
  })
  it('err in the same years more often than by chance', () => {
    const missedBy = facts.counts.map(({ position }) => new Set(scoreBoundaries(truth.boundaries, position).missed))
    const shared = [...missedBy[2]].filter((at) => missedBy[1].has(at)).length
    const byChance = (missedBy[2].size * missedBy[1].size) / truth.boundaries.length
    expect(shared).toBeGreaterThan(2 * byChance)
  })
  it('stand in the tables as in demo.json', () => {
    for (const { counter, position, mark } of facts.counts) {
      const { rows } = readCsv(read(`tables/count-${counter}.csv`), counter)
      expect(rows.map(([depth]) => Number(depth))).toEqual(
        position.map((at) => Number((at * facts.section.mmPerPx).toFixed(3))),
      )
      expect(rows.map((row) => row[1])).toEqual(mark)
    }
  })
})

describe('the dates of the demo', () => {
  const { mmPerPx } = facts.section
  const yearAt = (mm: number) => truth.years[truth.boundaries.findLastIndex((at) => at * mmPerPx <= mm)]
  it('lie in the varves of their years', () => {
    for (const date of facts.dates.filter(({ kind }) => kind === 'year')) {
      expect(Math.abs(yearAt((date.topMm + date.baseMm) / 2) - date.value)).toBeLessThanOrEqual(1)
    }
  })
  it('agree with IntCal20 at the true years within two sigma, but for the reworked wood', () => {
    const nodes = intcal20Nodes.split(',').map((row) => row.trim().split(' ').map(Number))
    const offsets = facts.dates
      .filter(({ kind }) => kind === 'c14')
      .map((date) => {
        const calBP = 1950 - yearAt((date.topMm + date.baseMm) / 2)
        const k = nodes.findIndex(([at]) => at > calBP)
        const [[x0, y0], [x1, y1, sigma]] = [nodes[k - 1], nodes[k]]
        const age = y0 + ((y1 - y0) * (calBP - x0)) / (x1 - x0)
        return { id: date.id, sigmas: (date.value - age) / Math.hypot(date.sigma, sigma) }
      })
    expect(offsets.filter(({ sigmas }) => Math.abs(sigmas) > 2).map(({ id }) => id)).toEqual(['ASK-C5'])
    expect(offsets).toHaveLength(5)
  })
})
