/**
 * The project file: one zip from which every number can be traced.
 *
 * project.json          form, schema, version, the SHA-256 of every other member, and the project itself
 * journal.jsonl         every transaction since the project began, one sealed line each (document/journal.ts)
 * datapackage.json      describes the tables (Data Package, version 2)
 * tables/*.csv          boundaries, counts, sections, spans, dates, notes, edits: for other programs, not read back
 * scans/<sha256>        the scans themselves, where asked for
 *
 * Exports: `saveProjectFile(state, scans?)` -> Blob (the same bytes for the same content), `openProjectFile(file, options?)`
 * -> the state with its whole undo history and the scans inside, or a Fault in words for the user; nothing is changed on the way.
 */
import { Fault } from '../../worker/check.ts'
import { identifier, listOf, nullable, oneOf, recordOf, sha256Text, text, whole } from '../document/form.ts'
import { decodeRecord, encodeRecord } from '../document/journal.ts'
import { checkSchema } from '../document/migrations.ts'
import { need } from '../document/outcome.ts'
import type { Outcome } from '../document/outcome.ts'
import { parseProject, projectToJson } from '../document/parseProject.ts'
import { currentSchema } from '../document/project.ts'
import type { Project } from '../document/project.ts'
import { sameJson } from '../document/sameJson.ts'
import { newState, replay, stateWithPast } from '../document/state.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Transaction } from '../document/transaction.ts'
import { dataPackage, projectTables } from './projectTables.ts'
import { entryBlob, readDirectory, readEntry, writeZip } from './zip.ts'
import type { ZipEntry, ZipMember } from './zip.ts'

/** A scan that goes into a project file or comes out of one. */
export interface PackedScan {
  sha256: string
  name: string
  file: Blob
}

export interface OpenedProject {
  state: WorkbenchState
  scans: PackedScan[]
}

export interface OpenOptions {
  /** SHA-256 of a scan, hexadecimal; the default reads it whole into memory. */
  hashScan?: (file: Blob) => Promise<string>
}

const fileForm = 'winterclay-project'

/** One member of the zip beside project.json. */
interface Member {
  path: string
  sha256: string
  /** For a scan: the name of the file it came from. */
  name: string | null
}

interface Manifest {
  form: typeof fileForm
  schema: number
  /** Version of the project: the number of its last edit. */
  version: number
  /** The journal holds the edits after this one; 0: all. */
  since: number
  id: string
  members: Member[]
  project: unknown
}

const readManifest = recordOf<Manifest>({
  form: oneOf(fileForm),
  schema: whole(1, Number.MAX_SAFE_INTEGER),
  version: whole(0, 0xffffffff),
  since: whole(0, 0xffffffff),
  id: identifier,
  members: listOf(recordOf<Member>({ path: text(200), sha256: sha256Text, name: nullable(text(1000)) }), 10_000),
  project: (value) => value,
})

async function sha256Of(bytes: Uint8Array<ArrayBuffer>): Promise<string> {
  const digest = new Uint8Array(await crypto.subtle.digest('SHA-256', bytes))
  return Array.from(digest, (byte) => byte.toString(16).padStart(2, '0')).join('')
}

async function sha256OfBlob(file: Blob): Promise<string> {
  return sha256Of(new Uint8Array(await file.arrayBuffer()))
}

function utf8(content: string): Uint8Array<ArrayBuffer> {
  return new TextEncoder().encode(content)
}

/** Writes a project, with the scans given. Rejects with a Fault when it would grow beyond 4 GB. */
export async function saveProjectFile(state: WorkbenchState, scans: readonly PackedScan[] = []): Promise<Blob> {
  const tables = projectTables(state)
  const hashes = new Map<string, string>()
  for (const { path, csv } of tables) hashes.set(path, await sha256Of(utf8(csv)))
  const texts: [path: string, content: string][] = [
    [
      'journal.jsonl',
      state.journal
        .slice(1)
        .map((transaction) => `${encodeRecord(transaction)}\n`)
        .join(''),
    ],
    ['datapackage.json', `${JSON.stringify(dataPackage(state, tables, hashes), null, 2)}\n`],
    ...tables.map(({ path, csv }): [string, string] => [path, csv]),
  ]
  const written: ZipMember[] = texts.map(([name, content]) => ({ name, content: utf8(content) }))
  const members: Member[] = []
  for (const { name, content } of written) {
    members.push({ path: name, sha256: await sha256Of(content as Uint8Array<ArrayBuffer>), name: null })
  }
  for (const { sha256, name, file } of scans.toSorted((a, b) => (a.sha256 < b.sha256 ? -1 : 1))) {
    written.push({ name: `scans/${sha256}`, content: file })
    members.push({ path: `scans/${sha256}`, sha256, name })
  }
  const { project, version, journal } = state
  const manifest: Manifest = {
    form: fileForm,
    schema: currentSchema,
    version,
    since: journal.since,
    id: project.id,
    members,
    project: projectToJson(project),
  }
  return writeZip([{ name: 'project.json', content: utf8(`${JSON.stringify(manifest)}\n`) }, ...written])
}

const mostText = 256e6
const mostScan = 0xffffffff

/** How large a member may be; null: no member of a project file. Paths that lead elsewhere are none. */
function limitOf(name: string): number | null {
  if (/^(project\.json|journal\.jsonl|datapackage\.json|tables\/[a-z]{1,40}\.csv)$/.test(name)) return mostText
  return /^scans\/[0-9a-f]{64}$/.test(name) ? mostScan : null
}

/** Reads a project file whole or not at all. */
export async function openProjectFile(
  file: Blob,
  { hashScan = sha256OfBlob }: OpenOptions = {},
): Promise<Outcome<OpenedProject>> {
  try {
    return await open(file, hashScan)
  } catch (error) {
    if (error instanceof Fault) return error
    // The file was moved or changed while it was read.
    if (error instanceof DOMException) {
      const message = `this project file could not be read (${error.name}); open it again`
      return new Fault('unreadable', 'project file', error.name, message)
    }
    throw error
  }
}

async function open(file: Blob, hashScan: (file: Blob) => Promise<string>): Promise<OpenedProject> {
  const entries = new Map((await readDirectory(file, limitOf)).map((entry) => [entry.name, entry]))
  const head = entries.get('project.json')
  if (!head)
    throw new Fault(
      'format',
      'project file',
      'project.json',
      'this is not a Winterclay project file: it has no project.json',
    )
  const manifest = parseManifest(await readEntry(file, head))
  entries.delete('project.json')
  for (const { path } of manifest.members) {
    if (!entries.has(path)) throw unfit(path, 'is missing from the file')
  }
  if (entries.size !== new Set(manifest.members.map(({ path }) => path)).size) {
    const stranger = [...entries.keys()].find((path) => !manifest.members.some((member) => member.path === path))
    throw unfit(stranger ?? '', 'is not listed in project.json')
  }
  let journal: Transaction[] = []
  const scans: PackedScan[] = []
  for (const member of manifest.members) {
    const entry = entries.get(member.path)!
    if (member.path.startsWith('scans/')) scans.push(await readScan(file, entry, member, hashScan))
    else {
      const bytes = await readEntry(file, entry)
      if ((await sha256Of(bytes)) !== member.sha256) throw wrongHash(member.path)
      if (member.path === 'journal.jsonl') journal = parseJournal(bytes, manifest.schema)
    }
  }
  return { state: restore(manifest, journal), scans }
}

function wrongHash(path: string): Fault {
  return unfit(path, 'does not have the SHA-256 that project.json gives for it: it was altered or damaged')
}

function unfit(path: string, what: string): Fault {
  const message = `${path} in this project file ${what}. Nothing was opened; use another copy of the file`
  return new Fault('unreadable', path, path, message)
}

function parseJson(bytes: Uint8Array, path: string): unknown {
  try {
    return JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(bytes))
  } catch {
    throw unfit(path, 'is not JSON')
  }
}

function parseManifest(bytes: Uint8Array): Manifest {
  const json = parseJson(bytes, 'project.json')
  const is = (key: string, value: unknown) =>
    typeof json === 'object' &&
    json !== null &&
    Object.hasOwn(json, key) &&
    (json as Record<string, unknown>)[key] === value
  if (!is('form', fileForm)) {
    throw new Fault(
      'format',
      'project file',
      'form',
      'this is not a Winterclay project file: its project.json is of another kind',
    )
  }
  // Before the form is judged: a newer one may rightly look different.
  checkSchema((json as { schema?: unknown }).schema)
  return readManifest(json, '')
}

function parseJournal(bytes: Uint8Array, schema: number): Transaction[] {
  const lines = new TextDecoder().decode(bytes).split('\n')
  if (lines.pop() !== '') throw unfit('journal.jsonl', 'is cut off')
  return lines.map((line, i) => {
    const transaction = decodeRecord(line, schema)
    if (!(transaction instanceof Fault)) return transaction
    throw new Fault(
      transaction.code,
      transaction.field,
      transaction.value,
      `journal.jsonl line ${i + 1}: ${transaction.message}`,
    )
  })
}

async function readScan(
  file: Blob,
  entry: ZipEntry,
  { path, sha256, name }: Member,
  hashScan: (file: Blob) => Promise<string>,
): Promise<PackedScan> {
  const blob = await entryBlob(file, entry)
  if (path !== `scans/${sha256}` || (await hashScan(blob)) !== sha256) throw wrongHash(path)
  return { sha256, name: name ?? sha256, file: blob }
}

/** The state of the file; where the journal is whole, replaying it must lead to the very project stored. */
function restore(
  { project: json, version, since, id }: Manifest,
  transactions: readonly Transaction[],
): WorkbenchState {
  const project = need(parseProject(json))
  if (project.id !== id) throw unfit('project.json', `names two projects, "${id}" and "${project.id}"`)
  if (since + transactions.length !== version) {
    throw unfit('journal.jsonl', `holds ${transactions.length} edits after edit ${since}, not up to edit ${version}`)
  }
  if (since > 0) return need(stateWithPast(project, since, transactions))
  const replayed = need(replay(newState(id), transactions))
  if (!sameProject(replayed.project, project)) {
    throw unfit('journal.jsonl', 'does not lead to the project in project.json')
  }
  return replayed
}

function sameProject(a: Project, b: Project): boolean {
  return sameJson(projectToJson(a), projectToJson(b))
}
