import { describe, expect, it } from 'vitest'
import type { Detrended } from '../../worker/core/detrend.ts'
import type { Profile } from '../../worker/core/profile.ts'
import { chronologyTable, layersTable, profileTable, sitesTable } from '../../worker/core/tables.ts'

const rows = [
  { from: 10.126, thickness: 15, probability: 0.98765432, kind: 'varve' as const },
  { from: 25.126, thickness: 30.5, probability: 1, kind: 'event' as const },
  { from: 60, thickness: NaN, probability: 0.5, kind: 'unreadable' as const },
]

describe('the table of layers', () => {
  it('has its columns in the agreed order, millimetres by the scale and rows numbered from 1', () => {
    expect(layersTable(rows, 0.05)).toBe(
      'layer,boundary_px,depth_mm,thickness_mm,probability,kind\n' +
        '1,10.13,0.5063,0.7500,0.987654,varve\n' +
        '2,25.13,1.2563,1.5250,1.000000,event\n' +
        '3,60.00,3.0000,,0.500000,unreadable\n',
    )
  })
  it('leaves depth and thickness empty without a scale', () => {
    expect(layersTable(rows.slice(0, 1), null).split('\n')[1]).toBe('1,10.13,,,0.987654,varve')
  })
  it('adds the depth of the section', () => {
    expect(layersTable(rows.slice(0, 1), 0.05, 100).split('\n')[1]).toBe('1,10.13,100.5063,0.7500,0.987654,varve')
  })
})

describe('the table of the profile', () => {
  const profile: Profile = {
    intensity: Float64Array.of(101.25, NaN, 99),
    usable: new Float32Array(3),
    lanes: new Float32Array(),
    laneCount: 0,
    tilt: new Float32Array(3),
  }
  const column = Float64Array.of(0.5, NaN, -0.00001)
  const detrended: Detrended = {
    trend: column,
    signal: column,
    standardised: true,
    spread: column,
    typicalThickness: column,
  }
  it('has a line a pixel, measured at the middle of the pixel, and empty cells where nothing is readable', () => {
    expect(profileTable(profile, detrended, 0.1)).toBe(
      'distance_px,depth_mm,intensity,detrended\n0.5,0.0500,101.2500,0.5000\n1.5,0.1500,,\n2.5,0.2500,99.0000,0.0000\n',
    )
  })
  it('refuses columns of another length', () => {
    const short = { ...detrended, signal: new Float64Array(2) }
    expect(() => profileTable(profile, short, 0.1)).toThrow('detrended.signal must be 3 long; it is Float64Array of 2')
  })
})

describe('the table of sites', () => {
  it('has a column a counter, whose name cannot be run as a formula', () => {
    const table = sitesTable({
      depthMm: [1.5, 3],
      labels: [
        { counter: 'A', label: [2, 0] },
        { counter: '=B', label: [1, 2] },
      ],
      probability: [0.99, 0.4],
    })
    expect(table).toBe(
      "site,depth_mm,A,'=B,probability\n1,1.5000,certain,doubtful,0.990000\n2,3.0000,absent,certain,0.400000\n",
    )
  })
})

describe('the table of a chronology', () => {
  const floating = {
    depthMm: [1, 2],
    thicknessMm: [1, NaN],
    varveYear: [1, 2],
    sigma: [0, 0.5],
    half95: [0, 1],
    calendarYear: null,
  }
  it('names calendar years only when it is anchored', () => {
    expect(chronologyTable(floating)).toBe(
      'layer,depth_mm,thickness_mm,varve_year,sd_years,half_width_95_years\n' +
        '1,1.0000,1.0000,1.00,0.00,0.00\n2,2.0000,,2.00,0.50,1.00\n',
    )
    expect(chronologyTable({ ...floating, calendarYear: [2018, 2017] }).split('\n')[1]).toBe(
      '1,1.0000,1.0000,1.00,0.00,0.00,2018.00',
    )
  })
})
