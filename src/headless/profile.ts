import { profileTable } from '../../worker/core/tables.ts'
import { wordsOf } from './arguments.ts'
import { deliveryOf } from './delivery.ts'
import { profileScan, readingSummary, scaleInWords } from './detection.ts'
import { folderHelp, overScans, type ScanResult } from './overScans.ts'
import { scanOptions, scanOptionsHelp, scanSettings, type ScanSettings } from './scanSettings.ts'
import type { Verb } from './verb.ts'

export const profile: Verb = {
  name: 'profile',
  summary: 'read the intensity along a transect of a scan, or of every scan of a folder',
  help: `npx winterclay profile SCAN [options] --out DIR
npx winterclay profile FOLDER [options] --out DIR

Reads the intensity along a transect, averaged across the band along the bedding, and takes out its trend.

${scanOptionsHelp}
  --out DIR          folder for the results; it is made where it does not exist
  --json             print the summary as JSON

Writes profile.csv and summary.json.
${folderHelp}

profile.csv: distance_px,depth_mm,intensity,detrended; empty cells where the profile is unreadable.
  distance_px is measured along the path from its first point, one row for each pixel.`,
  options: scanOptions,
  async run(call) {
    const [path] = wordsOf(call, 'SCAN')
    const settings = await scanSettings(call.options)
    const delivery = await deliveryOf(call)
    await overScans(path, delivery, (scan) => profiled(scan, settings))
  },
}

async function profiled(path: string, settings: ScanSettings): Promise<ScanResult> {
  const scan = await profileScan(path, settings)
  const { scale } = scan
  const summary = { scan: scan.name, ...readingSummary(scan, settings) }
  return {
    files: { 'profile.csv': profileTable(scan.profile, scan.detrended, scale.mmPerPx) },
    summary,
    words: `${scan.name}: ${summary.profile_rows} rows, ${summary.profile_rows_unreadable} unreadable; ${scaleInWords(scale)}`,
  }
}
