import { openScan } from '../../worker/reading/openScan.ts'

/** Times, ms, of what a user waits for: opening (hash and all), the first picture, and a column over the whole length. */
export interface ReadingTimes {
  open: number
  picture: number
  column: number
  /** Sum of the column's samples, so that nothing is left out and all readers can be seen to agree. */
  sum: number
}

self.onmessage = (event: MessageEvent<{ file: File; x: number; width: number; rows: number }>) => {
  void measure(event.data).then((times) => self.postMessage(times))
}

async function measure({
  file,
  x,
  width,
  rows,
}: {
  file: File
  x: number
  width: number
  rows: number
}): Promise<ReadingTimes> {
  const start = performance.now()
  const scan = await openScan(file, file.name)
  const opened = performance.now()
  const last = scan.info.levels.length - 1
  const coarse = scan.info.levels[last]
  await scan.readRegion({ x: 0, y: 0, width: coarse.width, height: coarse.height }, last)
  const seen = performance.now()
  let sum = 0
  for (let y = 0; y < scan.info.height; y += rows) {
    const { data } = await scan.readRegion({ x, y, width, height: Math.min(rows, scan.info.height - y) })
    for (const value of data) sum += value
  }
  const end = performance.now()
  scan.close()
  return { open: opened - start, picture: seen - opened, column: end - seen, sum }
}
