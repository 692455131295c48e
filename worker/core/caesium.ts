import { checkOneOf, Fault } from '../check.ts'

export const caesiumMarkers = ['onset', 'peak', 'chernobyl', 'fukushima'] as const
export type CaesiumMarker = (typeof caesiumMarkers)[number]
export const hemispheres = ['north', 'south'] as const
export type Hemisphere = (typeof hemispheres)[number]

/** The calendar year that a level in the 137Cs profile stands for. */
export interface CaesiumHorizon {
  year: number
  /** SD of the level's year: our own figure for the width of the deposition, not of a source. */
  sigma: number
  source: string
  /** What to look out for; empty where nothing. */
  caution: string
}

const horizons: Record<CaesiumMarker, Partial<Record<Hemisphere, CaesiumHorizon>>> = {
  onset: {
    north: { year: 1954, sigma: 1, source: 'first detected 1954 (Pennington et al. 1973)', caution: '' },
    south: { year: 1955, sigma: 1, source: 'first detected 1955 at 30-40 S (J. Environ. Radioact. 2008)', caution: '' },
  },
  peak: {
    north: { year: 1963, sigma: 0.5, source: 'largest deposition 1963 (Pennington et al. 1973)', caution: '' },
    south: { year: 1964.5, sigma: 0.7, source: 'largest deposition 1964/65 (from memory)', caution: '' },
  },
  chernobyl: {
    north: {
      year: 1986,
      sigma: 0.3,
      source: '26 April 1986 (Foucher et al. 2021)',
      caution: 'Chernobyl caesium can move down into layers decades older (Knof 1992)',
    },
  },
  fukushima: {
    north: { year: 2011, sigma: 0.3, source: '2011, near the source only (Foucher et al. 2021)', caution: 'local' },
  },
}

/** A level of the 137Cs profile as a known year. */
export function caesiumHorizon(marker: CaesiumMarker, hemisphere: Hemisphere): CaesiumHorizon {
  checkOneOf('137Cs marker', marker, caesiumMarkers)
  checkOneOf('hemisphere', hemisphere, hemispheres)
  const horizon = horizons[marker][hemisphere]
  if (horizon) return horizon
  throw new Fault('argument', '137Cs marker', marker, `there is no ${marker} level of 137Cs in the ${hemisphere}`)
}

/** Half-life of 137Cs [a] (DDEP; uncertainty 0.08). */
export const caesiumHalfLife = 30.05

/** Share of 137Cs that is left after some years. */
export const caesiumLeft = (years: number, halfLife = caesiumHalfLife) => Math.exp((-Math.LN2 * years) / halfLife)
