/**
 * The journal: every transaction since the project began, in order. Nothing is ever taken out of it.
 *
 * Exports: `Journal` (`append`, `at(seq)`, `last`, `since`, `all`), `encodeRecord(transaction)`, `decodeRecord(text)`,
 * `encodeSnapshot(project, version)`, `decodeSnapshot(text)`, `checksum(text)`. Replay and recovery: recover.ts.
 */
import { Fault } from '../../worker/check.ts'
import { crc32 } from './crc32.ts'
import { recordOf, whole } from './form.ts'
import { migrateTransaction } from './migrations.ts'
import { attempt, need } from './outcome.ts'
import type { Outcome } from './outcome.ts'
import { parseProject, projectToJson } from './parseProject.ts'
import { currentSchema } from './project.ts'
import type { Project } from './project.ts'
import { readTransaction } from './transaction.ts'
import type { Transaction } from './transaction.ts'

/**
 * An append-only list that never changes under who holds it: versions share one array, and each sees only its own length.
 * An edit therefore costs no copy of the whole past.
 */
export class Journal {
  /** Version before the first transaction held; 0 unless older ones were lost to damage. */
  readonly since: number
  readonly length: number
  private readonly shared: Transaction[]

  private constructor(since: number, shared: Transaction[], length: number) {
    this.since = since
    this.shared = shared
    this.length = length
  }

  static startingAt(version: number): Journal {
    return new Journal(version, [], 0)
  }

  /** Sequence number of the last transaction. */
  get version(): number {
    return this.since + this.length
  }

  get last(): Transaction | undefined {
    return this.at(this.version)
  }

  /** The transaction with this sequence number; undefined when it is not held. */
  at(seq: number): Transaction | undefined {
    return seq > this.since && seq <= this.version ? this.shared[seq - this.since - 1] : undefined
  }

  /** Transactions with from <= seq <= to, as far as held. */
  slice(from: number, to = this.version): Transaction[] {
    return this.shared.slice(Math.max(0, from - this.since - 1), Math.max(0, Math.min(to, this.version) - this.since))
  }

  append(transaction: Transaction): Journal {
    if (transaction.seq !== this.version + 1) {
      throw new Error(`the journal is at ${this.version}; it cannot take ${transaction.seq}`)
    }
    // Another future was already appended after this point: leave it to those who hold it.
    const shared = this.shared.length === this.length ? this.shared : this.shared.slice(0, this.length)
    shared.push(transaction)
    return new Journal(this.since, shared, this.length + 1)
  }
}

/** CRC-32 of the UTF-8 bytes, 8 hexadecimal digits: finds torn and altered records. */
export function checksum(content: string): string {
  return crc32(new TextEncoder().encode(content)).toString(16).padStart(8, '0')
}

/** One line of JSON, `{"checksum":"…","<name>":…}`, whose checksum is that of the inner text. */
function seal(name: string, inner: string): string {
  return `{"checksum":"${checksum(inner)}","${name}":${inner}}`
}

/** The inner text of a sealed line. Throws a Fault when it is torn or altered. */
function unseal(name: string, line: string): unknown {
  const head = `{"checksum":"00000000","${name}":`.length
  const inner = line.slice(head, -1)
  if (line !== seal(name, inner)) {
    throw new Fault(
      'unreadable',
      name,
      line,
      `this ${name} is torn or was altered: its checksum does not fit its content`,
    )
  }
  try {
    return JSON.parse(inner)
  } catch {
    throw new Fault('format', name, line, `this ${name} is not JSON`)
  }
}

export function encodeRecord(transaction: Transaction): string {
  return seal('transaction', JSON.stringify(transaction))
}

/** The transaction of a line written under `schema`; a Fault when the line is torn, altered or of the wrong form. */
export function decodeRecord(line: string, schema = currentSchema): Outcome<Transaction> {
  return attempt(() => readTransaction(migrateTransaction(unseal('transaction', line), schema), 'transaction'))
}

/** A project at a version. */
export interface Snapshot {
  readonly version: number
  readonly project: Project
}

export function encodeSnapshot({ project, version }: Snapshot): string {
  return seal('snapshot', JSON.stringify({ version, project: projectToJson(project) }))
}

export function decodeSnapshot(line: string): Outcome<Snapshot> {
  return attempt(() => {
    const read = recordOf<{ version: number; project: unknown }>({
      version: whole(0, 0xffffffff),
      project: (value) => value,
    })
    const { version, project } = read(unseal('snapshot', line), 'snapshot')
    return { version, project: need(parseProject(project)) }
  })
}
