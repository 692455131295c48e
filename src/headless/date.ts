import { existsSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { checkInteger, checkWithin, describe, Fault } from '../../worker/check.ts'
import { agesTable, dateChecksTable } from '../../worker/core/ageTables.ts'
import { layerRowKinds } from '../../worker/core/countedLayers.ts'
import type { CountedLayers } from '../../worker/core/countedLayers.ts'
import { dateCore, prepareDating } from '../../worker/core/dating.ts'
import type { DatingRequest } from '../../worker/core/dating.ts'
import { readDatesTable } from '../../worker/core/datesTable.ts'
import type { DateRow } from '../../worker/core/datesTable.ts'
import { latticeDefaults } from '../../worker/core/lattice.ts'
import { readLayerTable } from '../../worker/core/layerTable.ts'
import { refuseRows } from '../../worker/core/rowProblems.ts'
import { finish } from '../../worker/work.ts'
import { argumentFault, numberOption, textOption, wordsOf } from './arguments.ts'
import { curveOptions, curveOptionsHelp, curvesOf } from './curves.ts'
import { datingSummary } from './datingSummary.ts'
import { deliver, deliveryOf, jsonText } from './delivery.ts'
import { readJson, readText } from './files.ts'
import { readProjectDating } from './projectDating.ts'
import type { Call, Options, Verb } from './verb.ts'

export const date: Verb = {
  name: 'date',
  summary: 'tie a count to the calendar and test it against its dates',
  help: `npx winterclay date --layers layers.csv --dates dates.csv [options] --out DIR
npx winterclay date PROJECT [options] --out DIR

Works out the exact posterior of the calendar year of every layer, given the count with its errors and all dates.

  PROJECT            a project file: the agreed count of each section, or the model of three or more counts, or the
                     latest count with doubtful layers as one half; the dates in use; the coring year at an intact top
  --layers FILE      layers as "winterclay count" writes them: layer,depth_mm,thickness_mm,probability,kind
  --dates FILE       dates: id,kind,top_mm,base_mm,value,sigma,offset,offset_sigma; kind year (astronomical, 0 is
                     1 BCE; sigma 0: exact), c14 (14C a before 1950) or f14c; offset is subtracted from value.
                     Further columns if wanted: shape (normal; uniform: a year within value ± sigma), model
                     (normal, student-t, mixture; default normal for years, student-t for radiocarbon), curve
  --top-year Y       calendar year in which the top layer was laid down (default: the count floats)
${curveOptionsHelp}
  --bias-sd F        standard deviation of the logarithm of the bias shared by the whole count (default ${latticeDefaults.biasSd})
  --missed-rate F    years missed by the count per boundary, beside the probabilities (default: from the
                     expected_years of the summary.json beside the layers, where there is one; else 0)
  --out DIR          folder for the results; it is made where it does not exist
  --json             print the summary as JSON

Writes ages.csv, date_checks.csv and summary.json.

A layer's year is the calendar year in which it was laid down; a sample that lies inside a layer has that layer's
year, and one that spans several is compared with the mean of the curve over their years. The probability of a
layer is that of its young edge being a boundary between two years. An event bed takes no time and has the year of
the layer above it. A row of kind unreadable is one year placed by the count, or, with a thickness of its own, a
whole span whose years follow from the thickness of the layers around it.

ages.csv: layer,depth_mm,year_mean,year_sd,year_median,hpd68,hpd95; astronomical years, ranges as from..to joined by ;
date_checks.csv: id,year_median_with,year_median_without,residual_sigma,outlier_probability; without: the age of the
  date's level by the count and all other dates; residual: the date against that, in standard deviations.
summary.json: curves with SHA-256, bias asked for by the dates, overall fit, outliers, stretches whose missed years
  are out of line, hard-water signature.`,
  options: {
    ...curveOptions,
    layers: { type: 'string' },
    dates: { type: 'string' },
    'top-year': { type: 'string' },
    'bias-sd': { type: 'string' },
    'missed-rate': { type: 'string' },
  },
  async run(call) {
    const { names, missed, request } = call.words.length > 0 ? await fromProject(call) : await fromTables(call.options)
    const result = finish(dateCore(request))
    // Nothing is written, not even the folder, before everything is known to be good.
    const delivery = await deliveryOf(call)
    const summary = datingSummary(request, result, missed)
    const files = {
      'ages.csv': agesTable(names, request.layers.depth, result.ages),
      'date_checks.csv': dateChecksTable(result.checks.filter(({ fixed }) => !fixed)),
      'summary.json': jsonText(summary.json),
    }
    await deliver(delivery, files, summary.json, summary.words)
  },
}

/** What is to be dated, however it came in. */
interface Dated {
  names: string[]
  missed: MissedRate
  request: DatingRequest
}

async function fromTables(options: Options): Promise<Dated> {
  const layersFile = needed(options, 'layers')
  const datesFile = textOption(options, 'dates')
  const common = await commonRequest(options)
  const { layers, names } = await readLayers(layersFile)
  const rows = datesFile === null ? [] : await readDates(datesFile)
  const missed = await missedRate(numberOption(options, 'missed-rate'), layersFile, layers)
  const request: DatingRequest = { ...common, layers, dates: rows, chain: { missedRate: missed.rate } }
  if (datesFile !== null) refuseUnplaced(datesFile, rows, request)
  return { names, missed, request }
}

async function fromProject(call: Call): Promise<Dated> {
  const [file] = wordsOf(call, 'PROJECT')
  for (const name of ['layers', 'dates']) {
    const given = textOption(call.options, name)
    if (given !== null) argumentFault(`--${name}`, given, `--${name} cannot be given with a project; it has its own`)
  }
  const common = await commonRequest(call.options)
  const project = await readProjectDating(file)
  const option = numberOption(call.options, 'missed-rate')
  const missed: MissedRate =
    option === null
      ? { rate: project.missedRate, from: project.missedRate > 0 ? 'repeat counts' : 'none' }
      : { rate: checkWithin('--missed-rate', option, 0, 1), from: 'option' }
  const request: DatingRequest = {
    ...common,
    layers: project.layers,
    dates: project.dates,
    topYear: common.topYear ?? project.topYear,
    chain: { missedRate: missed.rate },
  }
  return { names: project.names, missed, request }
}

/** What both ways in have in common. */
async function commonRequest(options: Options): Promise<Pick<DatingRequest, 'topYear' | 'curves' | 'lattice'>> {
  const topYear = numberOption(options, 'top-year')
  if (topYear !== null) checkInteger('--top-year', topYear, -100_000, 3000)
  const biasSd = checkWithin('--bias-sd', numberOption(options, 'bias-sd') ?? latticeDefaults.biasSd, 0, 0.5)
  return { topYear, curves: await curvesOf(options), lattice: { biasSd } }
}

function needed(options: Options, name: string): string {
  return textOption(options, name) ?? argumentFault(`--${name}`, undefined, `--${name} FILE is missing`)
}

async function readLayers(file: string): Promise<{ layers: CountedLayers; names: string[] }> {
  const { layers, names, problems } = readLayerTable(await readText(file), file)
  if (problems.length > 0 && layers.depth.every((depth) => Number.isNaN(depth))) {
    const message = `${file} has no depths in mm; count the scan with its scale (--mm-per-px)`
    throw new Fault('format', 'depth_mm', file, message)
  }
  refuseRows(file, problems)
  return { layers, names }
}

async function readDates(file: string): Promise<DateRow[]> {
  const { rows, problems } = readDatesTable(await readText(file), file)
  refuseRows(file, problems)
  return rows
}

/** Dates outside the core, beyond or without their curve are named by the line they stand in. */
function refuseUnplaced(file: string, rows: readonly DateRow[], request: DatingRequest): void {
  const { problems } = prepareDating(request)
  refuseRows(
    file,
    problems.map(({ date, message }) => ({ line: rows[date].line, column: 'date', message })),
  )
}

/** The rate of missed years and where it comes from. */
export interface MissedRate {
  rate: number
  from: 'option' | 'summary.json of the count' | 'repeat counts' | 'none'
}

/**
 * A table of layers holds the boundaries of the most probable ladder only. What is expected at sites left out of it (and of
 * years without any candidate) is in the count's own summary: expected_years less the sum of the probabilities.
 */
async function missedRate(option: number | null, layersFile: string, layers: CountedLayers): Promise<MissedRate> {
  if (option !== null) return { rate: checkWithin('--missed-rate', option, 0, 1), from: 'option' }
  const file = join(dirname(layersFile), 'summary.json')
  if (!existsSync(file)) return { rate: 0, from: 'none' }
  const summary = await readJson(file)
  let sites = 0
  let expected = 0
  for (let row = 0; row < layers.depth.length; row++) {
    const kind = layerRowKinds[layers.kind[row]]
    if (kind !== 'varve' && kind !== 'unreadable') continue
    sites++
    expected += layers.probability[row]
  }
  if (typeof summary !== 'object' || summary === null) return { rate: 0, from: 'none' }
  const counted = 'layers' in summary ? summary.layers : null
  const total = 'expected_years' in summary ? summary.expected_years : null
  if (counted !== sites || typeof total !== 'number' || !Number.isFinite(total)) return { rate: 0, from: 'none' }
  const rate = Math.max(0, (total - expected) / sites)
  if (!(rate < 0.5)) {
    const message = `${file} expects ${total} years where the layers' probabilities add up to ${Math.round(expected)}; does it belong to ${describe(layersFile)}?`
    throw new Fault('format', 'expected_years', total, message)
  }
  return { rate, from: 'summary.json of the count' }
}
