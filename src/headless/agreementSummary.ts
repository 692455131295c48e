import type { Agreement } from '../../worker/core/counts.ts'
import type { CohenKappa } from '../../worker/core/kappa.ts'
import type { Estimate, LatentYears } from '../../worker/core/latentYears.ts'
import { siteLabels } from '../../worker/core/alignment.ts'
import { rounded } from './detection.ts'

/** What was asked, for the record. */
interface Asked {
  alignment: { tolerance: number }
  horizons: number[]
  sampler: { seed: number; draws: number }
}

const round = (value: number | null | undefined) => (value == null ? null : rounded(value, 6))
const pair = ([low, high]: [number, number]) => [round(low), round(high)]
const rate = ({ mean, interval95 }: Estimate) => ({ mean: round(mean), interval: pair(interval95) })

/** agreement.json: every figure under its published name. */
export function agreementSummary(agreement: Agreement, asked: Asked): Record<string, unknown> {
  const { totals: counters, spread, siteHalfLayer, alignment } = agreement
  const names = counters.map(({ name }) => name)
  const byName = <T>(value: (index: number) => T) => Object.fromEntries(names.map((name, i) => [name, value(i)]))
  const mean = (value: (index: number) => number) => names.reduce((sum, _, i) => sum + value(i), 0) / names.length
  return {
    totals: byName((i) => counters[i].halfLayer.years),
    marks: byName((i) => ({ certain: counters[i].certain, doubtful: counters[i].doubtful })),
    mean: round(spread.mean),
    median: round(spread.median),
    sd: round(spread.sd),
    rms: round(spread.rms),
    se: round(spread.se),
    half_width_95: round(spread.halfWidth95),
    percent_error: round(spread.percent.sd),
    percent_rms: round(spread.percent.rms),
    range: round(spread.range),
    half_range: round(spread.halfRange),
    percent_half_range: round(spread.percent.halfRange),
    asymmetric: {
      best: round(spread.asymmetric.best),
      plus: round(spread.asymmetric.plus),
      minus: round(spread.asymmetric.minus),
    },
    half_layer: {
      years: round(mean((i) => counters[i].halfLayer.years)),
      mce: round(mean((i) => counters[i].halfLayer.mce)),
      sigma: round(mean((i) => counters[i].halfLayer.sigma)),
      independent_sd: round(mean((i) => counters[i].halfLayer.independentSd)),
      counters: byName((i) => ({ years: counters[i].halfLayer.years, mce: counters[i].halfLayer.mce })),
      sites: { years: siteHalfLayer.years, mce: siteHalfLayer.mce },
    },
    sites: alignment.position.length,
    disagreements: agreement.disagreements.length,
    patterns: agreement.patterns.map(({ label, sites }) => ({ labels: label.map((one) => siteLabels[one]), sites })),
    ...pairFigures(agreement, names),
    chao: {
      seen: agreement.chao.seen,
      once: agreement.chao.once,
      twice: agreement.chao.twice,
      lower_bound: round(agreement.chao.lowerBound),
      bias_corrected: round(agreement.chao.biasCorrected),
    },
    latent: agreement.latent && latentFigures(agreement.latent),
    tolerance: asked.alignment.tolerance,
    seed: asked.sampler.seed,
    draws: asked.sampler.draws,
  }
}

function pairFigures({ pairs, fleiss }: Agreement, names: readonly string[]): Record<string, unknown> {
  const called = (counters: [number, number]) => counters.map((k) => names[k])
  return {
    kappa: {
      pairs: pairs.map(({ counters, kappa, linearKappa, table }) => ({
        counters: called(counters),
        ...kappaFigures(kappa),
        linear: kappaFigures(linearKappa),
        table,
        warning: kappa.paradox,
      })),
      fleiss: fleiss && {
        kappa: round(fleiss.kappa),
        agreement: round(fleiss.meanAgreement),
        by_chance: round(fleiss.chanceAgreement),
      },
    },
    chapman: pairs.map(({ counters, both, onlyFirst, onlySecond, capture }) => ({
      counters: called(counters),
      marked: [both + onlyFirst, both + onlySecond],
      matched: both,
      years: round(capture.chapman.years),
      sd: round(capture.chapman.sd),
      years_95: pair(capture.chapman.interval95),
      lincoln_petersen: { years: round(capture.lincolnPetersen.years), sd: round(capture.lincolnPetersen.sd) },
    })),
  }
}

function kappaFigures({ po, pe, kappa, ase, interval95 }: CohenKappa): Record<string, unknown> {
  return {
    agreement: round(po),
    by_chance: round(pe),
    kappa: round(kappa),
    ase: round(ase),
    interval_95: pair(interval95),
  }
}

function latentFigures(latent: LatentYears): Record<string, unknown> {
  const counters = latent.counters.map(({ name, missed, false: wrong }) => {
    const [miss, falseRate] = [rate(missed), rate(wrong)]
    return [name, { missed: miss.mean, missed_95: miss.interval, false: falseRate.mean, false_95: falseRate.interval }]
  })
  const { systematic, missedByAll } = latent
  return {
    counters: Object.fromEntries(counters) as Record<string, unknown>,
    expected_years: round(latent.expectedYears),
    sd: round(latent.sdYears),
    years_95: pair(latent.years95),
    missed_by_all: round(missedByAll.mean),
    missed_by_all_95: pair(missedByAll.interval95),
    systematic: { sd: systematic.sd, years_95: pair(systematic.years95) },
    priors: latent.priors,
    assumptions: latent.assumptions,
  }
}

/** The result in a few lines. */
export function agreementWords({ totals, spread, latent, disagreements, alignment }: Agreement): string[] {
  const year = (value: number) => value.toFixed(1)
  const lines = totals.map(
    ({ name, halfLayer, certain, doubtful }) =>
      `${name}: ${halfLayer.years} years (${certain} certain, ${doubtful} doubtful; maximum counting error ${halfLayer.mce})`,
  )
  if (spread.sd !== null) {
    lines.push(
      `mean ${year(spread.mean)}, SD ${year(spread.sd)} (${(spread.percent.sd ?? 0).toFixed(2)} %), half-range ${year(spread.halfRange)}`,
    )
  }
  lines.push(`${alignment.position.length} sites, ${disagreements.length} of them with disagreement`)
  if (!latent) return [...lines, 'one count only: no error from repeat counts']
  const [low, high] = latent.years95
  const [from, to] = latent.systematic.years95
  lines.push(
    `${year(latent.expectedYears)} years, ${year(low)} to ${year(high)} with 95 % probability by the counting error alone`,
  )
  lines.push(`${year(from)} to ${year(to)} with a bias shared by all counters of SD ${100 * latent.systematic.sd} %`)
  return lines
}
