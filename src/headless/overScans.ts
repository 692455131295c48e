import { join } from 'node:path'
import { Fault, type FaultCode } from '../../worker/check.ts'
import { failureOf } from '../../worker/dispatch.ts'
import { deliver, jsonText, makeFolder, writeResult, type Delivery } from './delivery.ts'
import { filesIn, isFolder } from './files.ts'

/** File names in a folder that are taken for scans. */
export const scanExtensions = ['.jpeg', '.jpg', '.png', '.tif', '.tiff', '.webp']

export const folderHelp = `With a folder, every scan in it (${scanExtensions.join(', ')}) is treated alike:
its results go to a folder of DIR that bears the scan's file name, and summary.json lists them all.
A scan that fails does not stop the others.`

/** What a verb makes of one scan. */
export interface ScanResult {
  /** Name -> text of the files beside summary.json. */
  files: Record<string, string>
  summary: object
  /** The summary in one line. */
  words: string
}

/** Runs a verb over one scan, or over every scan of a folder. */
export async function overScans(
  path: string,
  delivery: Delivery,
  treat: (path: string) => Promise<ScanResult>,
): Promise<void> {
  if (await isFolder(path)) return overFolder(path, delivery, treat)
  const { files, summary, words } = await treat(path)
  await deliver(delivery, { ...files, 'summary.json': jsonText(summary) }, summary, [words])
}

/** What fails is told in the summary and, when the others are done, as one Fault. */
async function overFolder(
  folder: string,
  delivery: Delivery,
  treat: (path: string) => Promise<ScanResult>,
): Promise<void> {
  const names = await filesIn(folder, scanExtensions)
  if (names.length === 0) {
    throw new Fault('argument', 'FOLDER', folder, `${folder} holds no scans (${scanExtensions.join(', ')})`)
  }
  const scans: object[] = []
  const lines: string[] = []
  const failed: string[] = []
  let worst: FaultCode = 'unreadable'
  for (const name of names) {
    try {
      const { files, summary, words } = await treat(join(folder, name))
      await writeScanFolder(delivery, name, { ...files, 'summary.json': jsonText(summary) })
      scans.push(summary)
      lines.push(words)
    } catch (error) {
      const { code, message } = failureOf(error)
      scans.push({ scan: name, error: { code, message } })
      failed.push(message.includes(name) ? message : `${name}: ${message}`)
      if (code === 'internal') worst = 'internal'
    }
  }
  const summary = { done: names.length - failed.length, failed: failed.length, scans }
  lines.push(`${summary.done} of ${names.length} scans done`)
  await deliver(delivery, { 'summary.json': jsonText(summary) }, summary, lines)
  if (failed.length > 0) {
    const message = `${failed.length} of ${names.length} scans failed: ${failed.join('; ')}`
    throw new Fault(worst, 'FOLDER', folder, message)
  }
}

async function writeScanFolder({ folder }: Delivery, name: string, files: Record<string, string>): Promise<void> {
  if (folder === null) return
  const target = join(folder, name)
  await makeFolder(target)
  for (const [file, text] of Object.entries(files)) await writeResult(target, file, text)
}
