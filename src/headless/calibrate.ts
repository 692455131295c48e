import { calibrate as calibrateDate } from '../../worker/core/calibrate.ts'
import type { Calibration } from '../../worker/core/calibrate.ts'
import { CurveShelf } from '../../worker/core/curveShelf.ts'
import { csvText, numberCell } from '../../worker/core/csv.ts'
import { errorModelNamed } from '../../worker/core/errorModel.ts'
import type { HpdRange } from '../../worker/core/hpd.ts'
import { checkAtLeast, checkPositive } from '../../worker/check.ts'
import { numberFrom, numberOption, textOption, wordsOf } from './arguments.ts'
import { curveOptions, curveOptionsHelp, curvesOf, curveSummary } from './curves.ts'
import { deliver, deliveryOf, jsonText } from './delivery.ts'
import { rounded } from './detection.ts'
import type { Verb } from './verb.ts'

export const calibrate: Verb = {
  name: 'calibrate',
  summary: 'turn one radiocarbon age into calendar years',
  help: `npx winterclay calibrate AGE SIGMA [options]

Calibrates one radiocarbon age (14C a before 1950) with its standard deviation; a negative AGE goes after --.

${curveOptionsHelp}
  --offset A         reservoir age or hard-water age, subtracted from AGE (default 0)
  --offset-sigma B   its standard deviation (default 0)
  --model M          normal, student-t (Christen & Perez 2009) or mixture (default normal)
  --out DIR          also write calibration.csv (cal_bp,probability) and summary.json
  --json             print the result as JSON

JSON: hpd68 and hpd95, the highest-density ranges of 68.3 and 95.4 % as [from_cal_bp, to_cal_bp, probability]
  from young to old; median, mean, sd and mode in cal BP; cut_at where the date runs beyond an end of the curve;
  the curve with its SHA-256.`,
  options: {
    ...curveOptions,
    offset: { type: 'string' },
    'offset-sigma': { type: 'string' },
    model: { type: 'string' },
  },
  async run(call) {
    const [ageText, sigmaText] = wordsOf(call, 'AGE', 'SIGMA')
    const value = numberFrom('AGE', ageText)
    const sigma = checkPositive('SIGMA', numberFrom('SIGMA', sigmaText))
    const offset = numberOption(call.options, 'offset') ?? 0
    const offsetSigma = checkAtLeast('--offset-sigma', numberOption(call.options, 'offset-sigma') ?? 0, 0)
    const model = errorModelNamed(textOption(call.options, 'model') ?? 'normal')
    const curve = new CurveShelf(await curvesOf(call.options)).curve(undefined)
    const result = calibrateDate({ quantity: 'age', value, sigma, offset, offsetSigma, model }, curve)
    const summary = {
      age: value,
      sigma,
      offset,
      offset_sigma: offsetSigma,
      model: model.kind,
      hpd68: result.hpd68.map(rangeOf),
      hpd95: result.hpd95.map(rangeOf),
      median: result.median,
      mean: rounded(result.mean, 2),
      sd: rounded(result.sd, 2),
      mode: result.mode,
      cut_at: result.cutAt,
      curve: curveSummary(curve.sources),
    }
    // Without a folder the result is printed either way; a folder is made only where it is asked for.
    const folder = textOption(call.options, 'out')
    const delivery = folder === null ? { folder, json: call.options.json === true } : await deliveryOf(call)
    const files = { 'calibration.csv': densityTable(result), 'summary.json': jsonText(summary) }
    await deliver(delivery, files, summary, inWords(value, sigma, result))
  },
}

const rangeOf = ({ from, to, probability }: HpdRange) => [from, to, rounded(probability, 4)]

function densityTable({ from, probability }: Calibration): string {
  return csvText(
    ['cal_bp', 'probability'],
    Array.from(probability, (p, i) => [String(from + i), numberCell(p, 8)]),
  )
}

function inWords(value: number, sigma: number, { hpd68, hpd95, median, mean, cutAt }: Calibration): string[] {
  const ranges = (list: readonly HpdRange[]) =>
    list.map(({ from, to, probability }) => `${from} to ${to} (${(100 * probability).toFixed(1)} %)`).join(', ')
  const lines = [
    `${value} ± ${sigma} 14C a, cal BP:`,
    `68.3 %: ${ranges(hpd68)}`,
    `95.4 %: ${ranges(hpd95)}`,
    `median ${median}, mean ${mean.toFixed(1)}`,
  ]
  if (cutAt !== null) lines.push(`the date runs beyond the ${cutAt} of the curve; the ranges are cut there`)
  return lines
}
