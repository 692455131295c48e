/** Does the count fit its dates, how much bias do they ask for, and where does it set in? */
import { chiSquareBeyond } from './chiSquare.ts'
import type { CountChain } from './countChain.ts'
import type { DateLikelihood } from './dates.ts'
import { hardWater } from './hardWater.ts'
import type { HardWater } from './hardWater.ts'
import type { DatedChronology } from './lattice.ts'
import { stepLaws } from './stepLaws.ts'
import { strayStretches } from './strayStretch.ts'
import type { StrayStretch } from './strayStretch.ts'

export interface CrossCheck {
  /**
   * Squares of the leave-one-out residuals of all dates but the outliers, against chi-square. The residuals are not quite
   * independent, so the probability is a guide. Null where no date can be compared with others.
   */
  fit: { chiSquare: number; degrees: number; probability: number } | null
  /** Dates that are more likely outliers than not. */
  outliers: string[]
  /** Per cent by which the true years exceed the counted ones, as the dates have it, and how much they ask for a bias. */
  bias: { percent: number; percentSd: number; bayesFactor: number }
  /** Every stretch between neighbouring dates, the strayest first; `named` where its years are out of line. */
  stretches: StrayStretch[]
  /** Null with fewer than three radiocarbon dates. */
  hardWater: HardWater | null
}

export function crossCheck(
  chain: CountChain,
  dates: readonly DateLikelihood[],
  { checks, bias }: DatedChronology,
  biasSd: number,
): CrossCheck {
  const compared = checks.filter(
    ({ residual, outlierProbability }) => Number.isFinite(residual) && outlierProbability <= 0.5,
  )
  const chiSquare = compared.reduce((sum, { residual }) => sum + residual * residual, 0)
  const degrees = compared.length
  const outliers = checks.filter(({ outlierProbability }) => outlierProbability > 0.5).map(({ id }) => id)
  const counted = stepLaws(chain, 1)
  return {
    fit: degrees > 0 ? { chiSquare, degrees, probability: chiSquareBeyond(chiSquare, degrees) } : null,
    outliers,
    bias: { percent: 100 * (bias.mean - 1), percentSd: 100 * bias.sd, bayesFactor: bias.bayesFactor },
    stretches: strayStretches(counted, dates, checks, biasSd),
    hardWater: hardWater(counted, dates, checks, biasSd),
  }
}
