import { access, constants, mkdir, stat, writeFile } from 'node:fs/promises'
import { dirname, join, resolve } from 'node:path'
import { Fault } from '../../worker/check.ts'
import { argumentFault, textOption } from './arguments.ts'
import { inWords } from './files.ts'
import { oneLine } from './oneLine.ts'
import type { Call } from './verb.ts'

/** Where a call's results go: a folder, standard output as JSON, or both. */
export interface Delivery {
  folder: string | null
  json: boolean
}

/** Reads --out and --json and makes the folder before any work is done, so that a bad folder is told at once. */
export async function deliveryOf(call: Call): Promise<Delivery> {
  const folder = textOption(call.options, 'out')
  const json = call.options.json === true
  if (folder === null && !json)
    argumentFault('--out', folder, 'give --out DIR for files, --json for standard output, or both')
  if (folder !== null) await makeFolder(folder)
  return { folder, json }
}

export async function makeFolder(folder: string): Promise<void> {
  try {
    await makeWithParents(resolve(folder))
    await access(folder, constants.W_OK)
  } catch (error) {
    throw new Fault('argument', '--out', folder, `cannot write into the folder ${folder}: ${inWords(error)}`)
  }
}

/** Level by level: where a file system makes no folders (/proc), Node's own recursive mkdir does not come back. */
async function makeWithParents(folder: string): Promise<void> {
  const isThere = async () => (await stat(folder).catch(() => null))?.isDirectory() === true
  if (await isThere()) return
  if (dirname(folder) !== folder) await makeWithParents(dirname(folder))
  try {
    await mkdir(folder)
  } catch (error) {
    // Another run may have made it in between.
    if (!(await isThere())) throw error
  }
}

export async function writeResult(folder: string, name: string, text: string): Promise<void> {
  try {
    await writeFile(join(folder, name), text)
  } catch (error) {
    throw new Fault('argument', '--out', folder, `cannot write ${join(folder, name)}: ${inWords(error)}`)
  }
}

/** JSON as the command writes it: two spaces, \n at the end; a number that is not finite is null. */
export function jsonText(value: unknown): string {
  return `${JSON.stringify(value, null, 2)}\n`
}

/** Writes the files (name -> text) when there is a folder, and prints the summary: as JSON, or in the given lines of words. */
export async function deliver(
  { folder, json }: Delivery,
  files: Readonly<Record<string, string>>,
  summary: unknown,
  words: readonly string[],
): Promise<void> {
  if (folder !== null) for (const [name, text] of Object.entries(files)) await writeResult(folder, name, text)
  process.stdout.write(json ? jsonText(summary) : words.map((line) => `${oneLine(line)}\n`).join(''))
}
