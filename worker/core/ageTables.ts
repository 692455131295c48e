import { checkSameLength } from '../check.ts'
import { csvText, decimals, numberCell, textCell } from './csv.ts'
import type { DateCheck } from './dateChecks.ts'
import { rangesAt } from './levelAges.ts'
import type { LevelAges, YearRanges } from './levelAges.ts'

/** Ages of layers, one line a row of the counted layers; astronomical years, ranges as from..to joined by ; older first. */
export function agesTable(names: readonly string[], depth: ArrayLike<number>, ages: LevelAges): string {
  checkSameLength('names', names, depth.length)
  function* rows(): Generator<string[]> {
    for (let i = 0; i < names.length; i++) {
      yield [
        textCell(names[i]),
        numberCell(depth[i], decimals.mm),
        numberCell(ages.mean[i], decimals.years),
        numberCell(ages.sd[i], decimals.years),
        String(ages.median[i]),
        rangesCell(ages.hpd68, i),
        rangesCell(ages.hpd95, i),
      ]
    }
  }
  return csvText(['layer', 'depth_mm', 'year_mean', 'year_sd', 'year_median', 'hpd68', 'hpd95'], rows())
}

function rangesCell(ranges: YearRanges, level: number): string {
  return rangesAt(ranges, level)
    .map(({ from, to }) => `${from}..${to}`)
    .join(';')
}

/** Every date against everything else; empty cells where nothing else says anything of its level. */
export function dateChecksTable(checks: readonly DateCheck[]): string {
  return csvText(
    ['id', 'year_median_with', 'year_median_without', 'residual_sigma', 'outlier_probability'],
    checks.map((check) => [
      textCell(check.id),
      numberCell(check.medianWith, 0),
      numberCell(check.medianWithout, 0),
      numberCell(check.residual, 3),
      numberCell(check.outlierProbability, decimals.probability),
    ]),
  )
}
