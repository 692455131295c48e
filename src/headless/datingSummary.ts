import { formatYear } from '../../worker/core/calendar.ts'
import type { CrossCheck } from '../../worker/core/crossCheck.ts'
import type { DatingRequest, DatingResult } from '../../worker/core/dating.ts'
import type { DateCheck } from '../../worker/core/lattice.ts'
import { latticeDefaults, rangesAt } from '../../worker/core/lattice.ts'
import { curveSummary } from './curves.ts'
import type { MissedRate } from './date.ts'
import { rounded } from './detection.ts'

/** The result of `date` as JSON, and in a line of words. */
export function datingSummary(request: DatingRequest, result: DatingResult, missed: MissedRate) {
  const { ages, bias, checks, crossCheck } = result
  const last = ages.mean.length - 1
  const end = (row: number) => ({
    year_mean: rounded(ages.mean[row], 2),
    year_sd: rounded(ages.sd[row], 2),
    hpd95: rangesAt(ages.hpd95, row).map(({ from, to, probability }) => [from, to, rounded(probability, 4)]),
  })
  const json = {
    layers: ages.mean.length,
    top_year: request.topYear,
    youngest: end(0),
    oldest: end(last),
    curves: curveSummary(result.curves),
    bias_sd: request.lattice?.biasSd ?? latticeDefaults.biasSd,
    bias: {
      factor: rounded(bias.mean, 5),
      factor_sd: rounded(bias.sd, 5),
      bayes_factor: significant(bias.bayesFactor),
      nodes: bias.factor.length,
    },
    missed_rate: rounded(missed.rate, 6),
    missed_rate_from: missed.from,
    log_evidence: rounded(result.logEvidence, 6),
    fit: fitOf(crossCheck),
    outliers: crossCheck.outliers,
    stretches: crossCheck.stretches.map((stretch) => ({
      above: stretch.above,
      below: stretch.below,
      counted_years: rounded(stretch.countedYears, 1),
      missed_years: rounded(stretch.missedYears, 1),
      missed_sd: rounded(stretch.missedSd, 1),
      missed_per_100: rounded(stretch.missedPer100, 2),
      probability: significant(stretch.probability),
      out_of_line: stretch.named,
    })),
    hard_water: hardWaterOf(crossCheck),
    dates: checks.filter(({ fixed }) => !fixed).map(dateOf),
  }
  return { json, words: wordsOf(result) }
}

/** Four significant digits, the same on every machine. */
const significant = (value: number) => (Number.isFinite(value) ? Number(value.toPrecision(4)) : null)

function fitOf({ fit }: CrossCheck) {
  if (!fit) return null
  return { chi_square: rounded(fit.chiSquare, 3), degrees: fit.degrees, probability: significant(fit.probability) }
}

function hardWaterOf({ hardWater }: CrossCheck) {
  if (!hardWater) return null
  return {
    offset: hardWater.offset,
    range: hardWater.range,
    log_gain: rounded(hardWater.logGain, 2),
    chi_square: rounded(hardWater.chiSquare, 2),
    degrees: hardWater.degrees,
    signature: hardWater.signature,
  }
}

function dateOf(check: DateCheck) {
  return {
    id: check.id,
    year_median_with: check.medianWith,
    year_median_without: Number.isNaN(check.medianWithout) ? null : check.medianWithout,
    hpd95_without: check.hpd95Without?.map(({ from, to }) => [from, to]) ?? null,
    residual_sigma: Number.isNaN(check.residual) ? null : rounded(check.residual, 3),
    outlier_probability: Number.isNaN(check.outlierProbability) ? null : rounded(check.outlierProbability, 6),
    overlap: Number.isNaN(check.overlap) ? null : rounded(check.overlap, 4),
  }
}

function wordsOf({ ages, bias, crossCheck }: DatingResult): string[] {
  const last = ages.mean.length - 1
  const name = (row: number) => `${formatYear(ages.mean[row], 'ce')} ± ${ages.sd[row].toFixed(1)}`
  const lines = [
    `${last + 1} layers from ${name(0)} to ${name(last)} a; true years per counted year ${bias.mean.toFixed(4)} ± ${bias.sd.toFixed(4)}`,
  ]
  if (crossCheck.outliers.length > 0) lines.push(`outliers: ${crossCheck.outliers.join(', ')}`)
  for (const { named, above, below, missedYears, missedSd } of crossCheck.stretches) {
    if (!named) continue
    lines.push(
      `between ${above} and ${below} the count is out of line: ${missedYears.toFixed(0)} ± ${missedSd.toFixed(0)} years missed`,
    )
  }
  const { hardWater } = crossCheck
  if (hardWater?.signature) {
    lines.push(
      `radiocarbon ages are all too old by about ${hardWater.offset} a while their wiggles match: a hard-water effect?`,
    )
  }
  return lines
}
