import { Fault } from '../../worker/check.ts'
import type { ScanShelf } from '../../worker/dispatch.ts'
import type { Scan } from '../../worker/reading/scanFile.ts'
import { openSharpScan } from './sharpScan.ts'

/** The scans a command has open, read with sharp from paths. */
export function sharpShelf(): ScanShelf {
  const scans = new Map<string, Scan>()
  return {
    async open(source) {
      if (typeof source !== 'string') {
        throw new Fault('internal', 'source', source, 'the headless command opens scans by their path')
      }
      const scan = await openSharpScan(source)
      scans.set(scan.info.sha256, scan)
      return scan
    },
    get(sha256) {
      const scan = scans.get(sha256)
      if (!scan) throw new Fault('internal', 'scan', sha256, `the scan ${sha256} is not open`)
      return scan
    },
    close(sha256) {
      scans.get(sha256)?.close()
      scans.delete(sha256)
    },
  }
}
