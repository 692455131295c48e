import { checkSameLength } from '../check.ts'
import { siteLabels } from './alignment.ts'
import { csvText, decimals, numberCell, textCell } from './csv.ts'
import type { Detrended } from './detrend.ts'
import type { LayerRow } from './layerRows.ts'
import type { Profile } from './profile.ts'

export { chosenBoundaries, layerRows, type LayerKind, type LayerRow, type YearBoundary } from './layerRows.ts'
export { csvText, decimals, numberCell, readCsv, textCell, type CsvTable } from './csv.ts'

/** Results as tables, for the page and the headless command alike. Decimals: see csv.ts. */

export const layersHeader = ['layer', 'boundary_px', 'depth_mm', 'thickness_mm', 'probability', 'kind'] as const

/**
 * Layers from the top of the path downcore. `boundary_px` is the distance along the path from its first point to the
 * layer's youngest edge; `mmPerPx` null (no scale) leaves depth and thickness empty. `layer` numbers the rows from 1.
 */
export function layersTable(rows: readonly LayerRow[], mmPerPx: number | null, depthTop = 0): string {
  const mm = mmPerPx ?? NaN
  return csvText(
    layersHeader,
    rows.map((row, i) => [
      String(i + 1),
      numberCell(row.from, decimals.px),
      numberCell(depthTop + row.from * mm, decimals.mm),
      numberCell(row.thickness * mm, decimals.mm),
      numberCell(row.probability, decimals.probability),
      row.kind,
    ]),
  )
}

/** The profile, one line a pixel along the path; cells of unreadable rows are empty. */
export function profileTable(profile: Profile, detrended: Detrended, mmPerPx: number | null, depthTop = 0): string {
  const { intensity } = profile
  checkSameLength('detrended.signal', detrended.signal, intensity.length)
  const mm = mmPerPx ?? NaN
  function* rows(): Generator<string[]> {
    for (let i = 0; i < intensity.length; i++) {
      const distance = i + 0.5
      yield [
        numberCell(distance, 1),
        numberCell(depthTop + distance * mm, decimals.mm),
        numberCell(intensity[i], decimals.intensity),
        numberCell(detrended.signal[i], decimals.intensity),
      ]
    }
  }
  return csvText(['distance_px', 'depth_mm', 'intensity', 'detrended'], rows())
}

/** Sites of aligned repeat counts, downcore; columns [sites]. */
export interface SiteColumns {
  /** NaN where the section has no scale. */
  depthMm: ArrayLike<number>
  /** One column a counter: index into siteLabels of alignment.ts. */
  labels: readonly { counter: string; label: ArrayLike<number> }[]
  /** Probability that the site is a year. */
  probability: ArrayLike<number>
}

/** Aligned counts: `site,depth_mm`, one column a counter, `probability`. */
export function sitesTable({ depthMm, labels, probability }: SiteColumns): string {
  checkSameLength('probability', probability, depthMm.length)
  for (const { counter, label } of labels) checkSameLength(`labels of ${counter}`, label, depthMm.length)
  function* rows(): Generator<string[]> {
    for (let i = 0; i < depthMm.length; i++) {
      yield [
        String(i + 1),
        numberCell(depthMm[i], decimals.mm),
        ...labels.map(({ label }) => siteLabels[label[i]]),
        numberCell(probability[i], decimals.probability),
      ]
    }
  }
  return csvText(['site', 'depth_mm', ...labels.map(({ counter }) => textCell(counter)), 'probability'], rows())
}

/** A floating or anchored chronology, one line a boundary, downcore; columns [boundaries], NaN where not known. */
export interface ChronologyColumns {
  depthMm: ArrayLike<number>
  thicknessMm: ArrayLike<number>
  /** Varve years from the top of the count to the boundary. */
  varveYear: ArrayLike<number>
  /** Standard deviation of the varve year, and the half width of its 95 % interval, in years. */
  sigma: ArrayLike<number>
  half95: ArrayLike<number>
  /** Astronomical calendar year of the layer below the boundary; null for a floating chronology. */
  calendarYear: ArrayLike<number> | null
}

/** `layer,depth_mm,thickness_mm,varve_year,sd_years,half_width_95_years` and, when anchored, `calendar_year` (astronomical). */
export function chronologyTable(columns: ChronologyColumns): string {
  const { depthMm, thicknessMm, varveYear, sigma, half95, calendarYear } = columns
  const n = depthMm.length
  checkSameLength('thicknessMm', thicknessMm, n)
  checkSameLength('varveYear', varveYear, n)
  checkSameLength('sigma', sigma, n)
  checkSameLength('half95', half95, n)
  if (calendarYear) checkSameLength('calendarYear', calendarYear, n)
  function* rows(): Generator<string[]> {
    for (let i = 0; i < n; i++) {
      yield [
        String(i + 1),
        numberCell(depthMm[i], decimals.mm),
        numberCell(thicknessMm[i], decimals.mm),
        numberCell(varveYear[i], decimals.years),
        numberCell(sigma[i], decimals.years),
        numberCell(half95[i], decimals.years),
        ...(calendarYear ? [numberCell(calendarYear[i], decimals.years)] : []),
      ]
    }
  }
  const header = ['layer', 'depth_mm', 'thickness_mm', 'varve_year', 'sd_years', 'half_width_95_years']
  return csvText(calendarYear ? [...header, 'calendar_year'] : header, rows())
}
