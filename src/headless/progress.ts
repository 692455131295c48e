import type { Progress } from '../../worker/work.ts'

/** A line on standard error that says how far a long job is; only for a person at a terminal. */
export function progressLine(name: string): { show: (progress: Progress) => void; clear: () => void } {
  if (!process.stderr.isTTY) return { show: () => undefined, clear: () => undefined }
  let shown = ''
  return {
    show({ stage, done, total }) {
      const line = `${name}: ${stage} ${total > 0 ? Math.floor((100 * done) / total) : 0} %`
      if (line !== shown) process.stderr.write(`\r\x1b[K${line}`)
      shown = line
    },
    clear() {
      if (shown !== '') process.stderr.write('\r\x1b[K')
      shown = ''
    },
  }
}
