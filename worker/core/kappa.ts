/** Agreement between counters beyond chance, from tables of their labels. */
import { checkAtLeast, checkOneOf, Fault } from '../check.ts'

/** How far two labels apart are taken to disagree: any difference alike, by steps, or by squared steps. */
export const kappaWeightings = ['none', 'linear', 'quadratic'] as const
export type KappaWeighting = (typeof kappaWeightings)[number]

/** Cohen's kappa of two counters; all figures NaN where chance agreement is complete and kappa has no meaning. */
export interface CohenKappa {
  /** Observed agreement, weighted where weights are used. */
  po: number
  /** Agreement expected by chance from the two counters' own shares of labels. */
  pe: number
  kappa: number
  /** Asymptotic standard error of kappa. */
  ase: number
  /** kappa -+ 1.96 ase. */
  interval95: [number, number]
  /** Standard error if there were no agreement beyond chance, and kappa over it. */
  ase0: number
  z: number
  /** Sites in the table. */
  sites: number
  /** High agreement with low kappa, in words; null where kappa can be read as it stands. */
  paradox: string | null
}

const normal975 = 1.959963984540054

/**
 * Cohen's kappa (Cohen 1960; weighted: Cohen 1968) of a square table, table[i][j] = sites that counter A labelled i and
 * counter B labelled j. Standard errors: Fleiss, Cohen & Everitt 1969, Psychological Bulletin 72, 323, eqs. 8-14 as the
 * formulas are usually quoted.
 */
export function cohenKappa(table: readonly (readonly number[])[], weighting: KappaWeighting = 'none'): CohenKappa {
  const labels = checkTable(table)
  checkOneOf('weighting', weighting, kappaWeightings)
  const total = table.flat().reduce((sum, cell) => sum + cell, 0)
  const p = table.map((row) => row.map((cell) => cell / total))
  const rows = p.map((row) => row.reduce((sum, cell) => sum + cell, 0))
  const columns = rows.map((_, j) => p.reduce((sum, row) => sum + row[j], 0))
  const weight = (i: number, j: number) => agreementWeight(i, j, labels, weighting)
  const sum = (term: (i: number, j: number) => number) =>
    rows.reduce((outer, _, i) => outer + columns.reduce((inner, _column, j) => inner + term(i, j), 0), 0)

  const po = sum((i, j) => weight(i, j) * p[i][j])
  const pe = sum((i, j) => weight(i, j) * rows[i] * columns[j])
  const kappa = (po - pe) / (1 - pe)
  // Mean weight that a label of one counter has with the labels of the other.
  const rowWeight = rows.map((_, i) => columns.reduce((mean, share, j) => mean + share * weight(i, j), 0))
  const columnWeight = columns.map((_, j) => rows.reduce((mean, share, i) => mean + share * weight(i, j), 0))
  const pull = (i: number, j: number) => rowWeight[i] + columnWeight[j]
  const spread = sum((i, j) => p[i][j] * (weight(i, j) - pull(i, j) * (1 - kappa)) ** 2)
  const variance = (spread - (kappa - pe * (1 - kappa)) ** 2) / (total * (1 - pe) ** 2)
  const spread0 = sum((i, j) => rows[i] * columns[j] * (weight(i, j) - pull(i, j)) ** 2)
  const ase = Math.sqrt(Math.max(0, variance))
  const ase0 = Math.sqrt(Math.max(0, (spread0 - pe * pe) / (total * (1 - pe) ** 2)))
  return {
    po,
    pe,
    kappa,
    ase,
    interval95: [kappa - normal975 * ase, kappa + normal975 * ase],
    ase0,
    z: kappa / ase0,
    sites: total,
    paradox: paradoxOf(po, pe, kappa),
  }
}

/** Weight of agreement, 1 on the diagonal: 1 - |i - j| / (c - 1), or the square of that distance. */
function agreementWeight(i: number, j: number, labels: number, weighting: KappaWeighting): number {
  if (weighting === 'none') return i === j ? 1 : 0
  const distance = Math.abs(i - j) / (labels - 1)
  return 1 - (weighting === 'linear' ? distance : distance * distance)
}

/** From here on agreement counts as high, kappa below as low; the bounds are ours, the paradox is Feinstein & Cicchetti's (1990). */
const highAgreement = 0.8
const lowKappa = 0.6

function paradoxOf(po: number, pe: number, kappa: number): string | null {
  if (!(pe < 1))
    return 'Both counters gave one label to every site: kappa is undefined; read the agreement and the patterns.'
  if (!(po >= highAgreement && kappa < lowKappa)) return null
  const share = `${(100 * po).toFixed(1)} % agreement, ${(100 * pe).toFixed(1)} % of it expected by chance`
  return `${share}: almost every site is marked by both, so kappa is low although the counters agree; read the agreement and the patterns beside it.`
}

function checkTable(table: readonly (readonly number[])[]): number {
  const labels = table.length
  if (labels < 2 || table.some((row) => row.length !== labels)) {
    const shape = `${labels} x ${table[0]?.length ?? 0}`
    throw new Fault('argument', 'table', shape, `table must be square with at least 2 labels; it is ${shape}`)
  }
  for (const [i, row] of table.entries())
    for (const [j, cell] of row.entries()) checkAtLeast(`table[${i}][${j}]`, cell, 0)
  if (!table.flat().some((cell) => cell > 0)) {
    throw new Fault('argument', 'table', 0, 'table must hold at least one site; every cell is 0')
  }
  return labels
}

export interface FleissKappa {
  /** Mean agreement of pairs of ratings over the sites, and what chance would give. */
  meanAgreement: number
  chanceAgreement: number
  kappa: number
}

/**
 * Fleiss' kappa of many counters (Fleiss 1971, Psychological Bulletin 76, 378): ratings[i][j] = counters that gave label j
 * to site i; every site rated by the same number of counters, two at least.
 */
export function fleissKappa(ratings: readonly (readonly number[])[]): FleissKappa {
  const raters = ratings[0]?.reduce((sum, count) => sum + count, 0) ?? 0
  const labels = ratings[0]?.length ?? 0
  if (!(raters >= 2))
    throw new Fault('argument', 'ratings', raters, `ratings must have at least 2 counters a site; they have ${raters}`)
  const shares = new Float64Array(labels)
  let agreement = 0
  for (const [i, site] of ratings.entries()) {
    const here = site.reduce((sum, count) => sum + count, 0)
    if (here !== raters || site.length !== labels) {
      throw new Fault(
        'argument',
        `ratings[${i}]`,
        here,
        `ratings[${i}] must sum to ${raters} over ${labels} labels, as the first site does; it sums to ${here}`,
      )
    }
    agreement += site.reduce((sum, count) => sum + count * (count - 1), 0) / (raters * (raters - 1))
    for (let j = 0; j < labels; j++) shares[j] += site[j] / (raters * ratings.length)
  }
  const meanAgreement = agreement / ratings.length
  const chanceAgreement = shares.reduce((sum, share) => sum + share * share, 0)
  return { meanAgreement, chanceAgreement, kappa: (meanAgreement - chanceAgreement) / (1 - chanceAgreement) }
}
