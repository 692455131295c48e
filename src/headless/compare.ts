import { basename, extname } from 'node:path'
import { marksOfTable, readCountTable } from '../../worker/core/countTable.ts'
import { compareCounts, defaultAgreement, type Agreement } from '../../worker/core/counts.ts'
import type { CounterMarks } from '../../worker/core/counterMarks.ts'
import { csvText, decimals, numberCell, sitesTable, textCell } from '../../worker/core/tables.ts'
import { checkPositive, checkWithin } from '../../worker/check.ts'
import { argumentFault, numberFrom, numberOption, textOption } from './arguments.ts'
import { agreementSummary, agreementWords } from './agreementSummary.ts'
import { deliver, deliveryOf, jsonText } from './delivery.ts'
import { readText } from './files.ts'
import { progressLine } from './progress.ts'
import type { Options, Verb } from './verb.ts'

export const compare: Verb = {
  name: 'compare',
  summary: 'compare repeat counts of one core and say how wrong they may be',
  help: `npx winterclay compare COUNT.csv COUNT.csv … [options] --out DIR

Aligns counts of the same core by several counters and reports the counting error by the published
conventions, the agreement, and a model of what each counter misses and marks wrongly.

  COUNT.csv          one file per counter and pass, columns depth_mm,mark; mark is certain or doubtful;
                     rows run downcore; each row is one year, a doubtful one half
  --tolerance F      largest extent of the marks of one boundary, as a fraction of the local layer
                     thickness (default ${defaultAgreement.alignment.tolerance})
  --bias-sd F        standard deviation of the bias that all counters share, as a fraction of the years
                     (default ${defaultAgreement.systematicSd}); reported as a term of its own
  --horizons "a b …" depths in mm between which the errors are also told; writes intervals.csv
  --seed N           seed of the model's draws (default ${defaultAgreement.sampler.seed})
  --out DIR          folder for the results; it is made where it does not exist
  --json             print agreement.json instead of a few words

Writes sites.csv and agreement.json.

sites.csv: site,depth_mm, one column per counter (absent, doubtful, certain), probability (that the site
  is a year; with a single count 1 for certain and 0.5 for doubtful).
agreement.json: totals of each counter (doubtful layers half), their mean, sd (n - 1), rms (n), se,
  percent_error (100 sd / mean), half_range; half_layer (mean over the counters; mce is the maximum
  counting error, summed linearly); kappa and chapman by pairs, chao; latent: for each counter the share
  of years missed and the false marks per year, expected_years, years_95 (the counting error alone) and
  missed_by_all. What all counters do alike is not in it: see systematic.`,
  options: {
    tolerance: { type: 'string' },
    'bias-sd': { type: 'string' },
    horizons: { type: 'string' },
    seed: { type: 'string' },
  },
  async run(call) {
    if (call.words.length === 0)
      argumentFault('COUNT.csv', undefined, 'COUNT.csv is missing: give one file per counter')
    const settings = settingsOf(call.options)
    const delivery = await deliveryOf(call)
    const counts = await readCounts(call.words)
    const agreement = withProgress(counts, settings)
    const summary = agreementSummary(agreement, settings)
    await deliver(
      delivery,
      { ...filesOf(agreement), 'agreement.json': jsonText(summary) },
      summary,
      agreementWords(agreement),
    )
  },
}

type Settings = Pick<typeof defaultAgreement, 'alignment' | 'systematicSd' | 'horizons' | 'sampler'>

function settingsOf(options: Options): Settings {
  const { alignment, sampler, systematicSd } = defaultAgreement
  const tolerance = checkPositive('--tolerance', numberOption(options, 'tolerance') ?? alignment.tolerance)
  const seed = numberOption(options, 'seed') ?? sampler.seed
  if (!Number.isInteger(seed) || seed < 0)
    argumentFault('--seed', seed, `--seed must be a whole number from 0; it is ${seed}`)
  const horizons =
    textOption(options, 'horizons')
      ?.trim()
      .split(/[\s,;]+/) ?? []
  return {
    alignment: { ...alignment, tolerance },
    systematicSd: checkWithin('--bias-sd', numberOption(options, 'bias-sd') ?? systematicSd, 0, 1),
    horizons: horizons.map((text, i) => numberFrom(`number ${i + 1} of --horizons`, text)),
    sampler: { ...sampler, seed },
  }
}

/** Reads every file before any is compared; counters are called as their files, twice the same name as "name (2)". */
async function readCounts(paths: readonly string[]): Promise<CounterMarks[]> {
  const counts: CounterMarks[] = []
  for (const path of paths) {
    const plain = basename(path, extname(path))
    const before = counts.filter(({ name }) => name === plain || name.startsWith(`${plain} (`)).length
    const counter = before > 0 ? `${plain} (${before + 1})` : plain
    counts.push(marksOfTable(readCountTable(await readText(path), path), path, counter))
  }
  return counts
}

function withProgress(counts: CounterMarks[], settings: Settings): Agreement {
  const progress = progressLine(`${counts.length} counts`)
  const work = compareCounts(counts, settings)
  try {
    for (;;) {
      const step = work.next()
      if (step.done) return step.value
      progress.show(step.value)
    }
  } finally {
    progress.clear()
  }
}

function filesOf(agreement: Agreement): Record<string, string> {
  const { alignment, probability, intervals, cumulative } = agreement
  const k = alignment.counters.length
  const labels = alignment.counters.map((counter, c) => ({
    counter,
    label: Array.from(alignment.position, (_, s) => alignment.label[s * k + c]),
  }))
  const files: Record<string, string> = {
    'sites.csv': sitesTable({ depthMm: alignment.position, labels, probability }),
  }
  if (intervals.length > 0) files['intervals.csv'] = intervalsTable(alignment.counters, [...intervals, ...cumulative])
  return files
}

/** Errors by interval and then cumulatively; an open end is an empty cell. */
function intervalsTable(counters: readonly string[], stretches: Agreement['intervals']): string {
  const header = ['from_mm', 'to_mm', ...counters.map(textCell), 'mean', 'sd', 'rms', 'percent_error', 'half_range']
  const years = (value: number | null | undefined) => numberCell(value ?? NaN, decimals.years)
  return csvText(
    [...header, 'mce', 'expected_years', 'years_sd', 'years_low', 'years_high'],
    stretches.map(({ from, to, years: own, repeat, halfLayer, latent }) => {
      const mces = halfLayer.flatMap((one) => (one ? [one.mce] : []))
      return [
        numberCell(from, decimals.mm),
        numberCell(to, decimals.mm),
        ...own.map(years),
        ...[repeat?.mean, repeat?.sd, repeat?.rms, repeat?.percent.sd, repeat?.halfRange].map(years),
        years(mces.length > 0 ? mces.reduce((sum, mce) => sum + mce, 0) / mces.length : null),
        ...[latent?.years, latent?.sd, latent?.years95[0], latent?.years95[1]].map(years),
      ]
    }),
  )
}
