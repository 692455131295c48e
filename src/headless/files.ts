import { readdir, readFile, stat } from 'node:fs/promises'
import { Fault } from '../../worker/check.ts'
import { readCsv, type CsvTable } from '../../worker/core/tables.ts'

/** What an error of the file system means, without codes and addresses. */
export function inWords(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : ''
  const meanings: Record<string, string> = {
    ENOENT: 'it does not exist',
    EACCES: 'permission denied',
    EPERM: 'permission denied',
    EISDIR: 'it is a folder',
    ENOTDIR: 'a part of its path is a file',
    EEXIST: 'a file of that name is in the way',
    EROFS: 'the file system is read-only',
    ENOSPC: 'the disk is full',
    ENAMETOOLONG: 'its name is too long',
    ELOOP: 'its links lead in a circle',
    ERR_INVALID_ARG_VALUE: 'its name holds a null byte',
  }
  if (Object.hasOwn(meanings, code)) return meanings[code]
  return error instanceof Error ? error.message : String(error)
}

export async function isFolder(path: string): Promise<boolean> {
  try {
    return (await stat(path)).isDirectory()
  } catch (error) {
    throw new Fault('unreadable', 'path', path, `cannot open ${path}: ${inWords(error)}`)
  }
}

/** Names of the files in a folder that end in one of the given extensions (lower case, with dot), sorted by code point. */
export async function filesIn(folder: string, extensions: readonly string[]): Promise<string[]> {
  try {
    const entries = await readdir(folder, { withFileTypes: true })
    return entries
      .filter((entry) => !entry.isDirectory())
      .map((entry) => entry.name)
      .filter((name) => extensions.some((extension) => name.toLowerCase().endsWith(extension)))
      .sort((a, b) => (a < b ? -1 : 1))
  } catch (error) {
    throw new Fault('unreadable', 'path', folder, `cannot list ${folder}: ${inWords(error)}`)
  }
}

/** Larger text files than this are no tables or recipes. */
const mostBytes = 256 * 1024 * 1024

/** A UTF-8 text file; other bytes are refused rather than replaced. */
export async function readText(path: string): Promise<string> {
  let bytes: Uint8Array
  try {
    const { size } = await stat(path)
    if (size > mostBytes) {
      throw new Fault('too-large', 'path', path, `${path} has ${size} bytes; a text file may have ${mostBytes} at most`)
    }
    bytes = await readFile(path)
  } catch (error) {
    if (error instanceof Fault) throw error
    throw new Fault('unreadable', 'path', path, `cannot read ${path}: ${inWords(error)}`)
  }
  try {
    return new TextDecoder('utf-8', { fatal: true }).decode(bytes)
  } catch {
    throw new Fault('format', 'path', path, `${path} is not UTF-8 text`)
  }
}

export async function readJson(path: string): Promise<unknown> {
  const text = await readText(path)
  try {
    return JSON.parse(text) as unknown
  } catch (error) {
    throw new Fault('format', 'path', path, `${path} is not JSON: ${(error as Error).message.split('\n')[0]}`)
  }
}

/** A CSV table that has at least the given columns; the cells of those columns, one record a row, by name. */
export async function readTable<Column extends string>(
  path: string,
  columns: readonly Column[],
): Promise<{ rows: Record<Column, string>[]; lines: number[] }> {
  const table = readCsv(await readText(path), path)
  const places = columns.map((column) => placeOf(table, column, path))
  const rows = table.rows.map(
    (cells) =>
      Object.fromEntries(columns.map((column, i) => [column, cells[places[i]].trim()])) as Record<Column, string>,
  )
  return { rows, lines: table.lines }
}

function placeOf(table: CsvTable, column: string, path: string): number {
  const place = table.header.indexOf(column)
  if (place < 0) {
    const message = `${path} has no column ${column}; its columns are ${table.header.join(', ')}`
    throw new Fault('format', column, table.header, message)
  }
  return place
}
