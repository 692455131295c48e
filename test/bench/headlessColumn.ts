import { openSharpScan } from '../../src/headless/sharpScan.ts'
import type { ReadingTimes } from './readingWorker.ts'

/** As the page's worker measures, headless; in a process of its own, so that its memory can be told. */
export async function headlessColumn(path: string, x: number, width: number, rows: number): Promise<ReadingTimes> {
  const start = performance.now()
  const scan = await openSharpScan(path)
  const opened = performance.now()
  let sum = 0
  for (let y = 0; y < scan.info.height; y += rows) {
    const { data } = await scan.readRegion({ x, y, width, height: Math.min(rows, scan.info.height - y) })
    for (const value of data) sum += value
  }
  const end = performance.now()
  scan.close()
  return { open: opened - start, picture: NaN, column: end - opened, sum }
}
