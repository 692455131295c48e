import { chosenBoundaries, layerRows, layersTable, profileTable, type LayerKind } from '../../worker/core/tables.ts'
import { wordsOf } from './arguments.ts'
import { deliveryOf } from './delivery.ts'
import { countScan, readingSummary, rounded, scaleInWords } from './detection.ts'
import { folderHelp, overScans, type ScanResult } from './overScans.ts'
import {
  scanOptions,
  scanOptionsHelp,
  scanSettings,
  spansHelp,
  spansOption,
  type ScanSettings,
} from './scanSettings.ts'
import type { Verb } from './verb.ts'

export const count: Verb = {
  name: 'count',
  summary: 'find the years on a scan, or on every scan of a folder',
  help: `npx winterclay count SCAN [options] --out DIR
npx winterclay count FOLDER [options] --out DIR

Reads the profile along a transect, finds the layers and decides which of them are years.

${scanOptionsHelp}
${spansHelp}
  --out DIR          folder for the results; it is made where it does not exist
  --json             print the summary as JSON

Writes layers.csv, profile.csv and summary.json.
${folderHelp}

layers.csv: layer,boundary_px,depth_mm,thickness_mm,probability,kind, from the young end of the path downcore.
  boundary_px is the distance along the path from its first point to the youngest edge of the layer.
  Kind varve is a year that is seen, unreadable a year that passed in unreadable ground and is placed by
  the thickness around it, event a bed that took no time. There is one row of kind varve or unreadable
  for each boundary of the most probable ladder: the couplet that the start of the path cuts has no
  boundary on its young side and is not listed, and the last layer, cut by the end of the path, has no
  thickness. Thickness leaves event beds out and is empty where an edge is not seen.
profile.csv: distance_px,depth_mm,intensity,detrended; empty cells where the profile is unreadable.
summary.json: layers (years of the most probable ladder), expected_years, years_95, mm_per_px and what it
  rests on, the path, the recipe, the scan's SHA-256.`,
  options: { ...scanOptions, ...spansOption },
  async run(call) {
    const [path] = wordsOf(call, 'SCAN')
    const settings = await scanSettings(call.options)
    const delivery = await deliveryOf(call)
    await overScans(path, delivery, (scan) => counted(scan, settings))
  },
}

/** The tables and the summary of one scan. */
async function counted(path: string, settings: ScanSettings): Promise<ScanResult> {
  const scan = await countScan(path, settings)
  const { ladder, candidates, scale } = scan
  const rows = layerRows(chosenBoundaries(ladder), settings.spans)
  const ofKind = (kind: LayerKind) => rows.filter((row) => row.kind === kind).length
  const layers = ofKind('varve') + ofKind('unreadable')
  const [low, high] = ladder.years95
  const summary = {
    scan: scan.name,
    layers,
    expected_years: rounded(ladder.expectedYears, 3),
    years_sd: rounded(ladder.sdYears, 3),
    years_95: [low, high],
    years_unreadable: ofKind('unreadable'),
    events: ofKind('event'),
    lamina: candidates.lamina,
    spans: settings.spans,
    ...readingSummary(scan, settings),
  }
  return {
    files: {
      'layers.csv': layersTable(rows, scale.mmPerPx),
      'profile.csv': profileTable(scan.profile, scan.detrended, scale.mmPerPx),
    },
    summary,
    words: `${scan.name}: ${layers} years, ${low} to ${high} with 95 % probability; ${scaleInWords(scale)}`,
  }
}
