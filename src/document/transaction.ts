/**
 * A transaction: steps and who made them, when and on what evidence. The only way a project changes.
 *
 * Exports: `Transaction`, `Edit` (what a command answers with), `Cause`, `Stamp`,
 * `createTransaction(version, edit, stamp)`, `readTransaction` (from JSON; a transaction is plain JSON itself).
 */
import { Fault } from '../../worker/check.ts'
import { jsonValue, listOf, nullable, recordOf, refuse, text, whole } from './form.ts'
import type { Json, Reader } from './form.ts'
import { readStep } from './steps.ts'
import type { Step } from './steps.ts'

/** The computation a step came from: enough to run it again and get the same. */
export interface Cause {
  /** Kind of job, for example `ladder`. */
  readonly job: string
  /** Name and version of the method. */
  readonly method: string
  /** The parameters it ran with. */
  readonly recipe: Json
  /** Seed of its random numbers; null: it used none. */
  readonly seed: number | null
  /** Hash of what it was given. */
  readonly inputHash: string
}

/** What a command answers with: steps that belong together, and a word for the act (`place`, `move.key`, `accept`). */
export interface Edit {
  readonly userEvent: string
  readonly steps: readonly Step[]
  readonly cause?: Cause
}

/** Who and when, handed in by the session: the document knows no clock. */
export interface Stamp {
  /** Milliseconds since 1970-01-01 UTC. */
  readonly time: number
  readonly author: string
}

/** Sequence numbers of transactions, both included. */
export interface SequenceRange {
  readonly from: number
  readonly to: number
}

export interface Transaction extends Edit, Stamp {
  /** Sequence number, from 1: the version of the project after it. */
  readonly seq: number
  /** Version of the project it starts from. */
  readonly base: number
  /** In an undo or redo: the transactions whose steps it takes back. */
  readonly reverts?: SequenceRange
}

/** Dot-separated words. */
const userEventForm = /^[a-z]+(\.[a-z]+)*$/

/** The transaction that makes an edit at a version of the project. An edit without steps is misuse. */
export function createTransaction(version: number, edit: Edit, stamp: Stamp, reverts?: SequenceRange): Transaction {
  if (edit.steps.length === 0) throw new Error('an edit without steps makes no transaction')
  if (!userEventForm.test(edit.userEvent)) throw new Error(`userEvent must be dotted words; it is "${edit.userEvent}"`)
  if (!Number.isInteger(stamp.time)) throw new Error(`time must be in whole milliseconds; it is ${stamp.time}`)
  return {
    seq: version + 1,
    base: version,
    userEvent: edit.userEvent,
    time: stamp.time,
    author: stamp.author,
    steps: edit.steps,
    ...(edit.cause && { cause: edit.cause }),
    ...(reverts && { reverts }),
  }
}

const readCause = recordOf<Cause>({
  job: text(100),
  method: text(200),
  recipe: jsonValue,
  seed: nullable(whole(0, 0xffffffff)),
  inputHash: text(200),
})

const readUserEvent: Reader<string> = (value, at) => {
  if (typeof value !== 'string' || value.length > 100 || !userEventForm.test(value)) {
    refuse(at, value, 'words joined by dots')
  }
  return value
}

const sequence = whole(1, 0xffffffff)

const readRange = recordOf<SequenceRange>({ from: sequence, to: sequence })

const readForm = recordOf<Omit<Transaction, 'cause' | 'reverts'>, { cause: Cause; reverts: SequenceRange }>(
  {
    seq: sequence,
    base: whole(0, 0xffffffff - 1),
    userEvent: readUserEvent,
    time: whole(0, 8.64e15),
    author: text(200),
    steps: listOf(readStep, 100_000),
  },
  { cause: readCause, reverts: readRange },
)

/** Checks a transaction that came as JSON; throws a Fault naming what is wrong where. */
export const readTransaction: Reader<Transaction> = (value, at) => {
  const transaction: Transaction = readForm(value, at)
  const { seq, base, steps, reverts, userEvent } = transaction
  if (steps.length === 0) refuse(`${at}.steps`, steps, 'a list of at least 1')
  if (base !== seq - 1) {
    throw new Fault('format', `${at}.base`, base, `${at}.base must be one before seq, ${seq}; it is ${base}`)
  }
  if ((userEvent === 'undo' || userEvent === 'redo') !== (reverts !== undefined)) {
    refuse(`${at}.reverts`, reverts, 'given in an undo or redo, and in nothing else')
  }
  if (reverts && !(reverts.from <= reverts.to && reverts.to < seq)) {
    refuse(`${at}.reverts`, `${reverts.from} to ${reverts.to}`, `an ascending range before ${seq}`)
  }
  return transaction
}
