/**
 * Edits of the core's fields and of the records of a collection.
 *
 * Exports: the step types, `coreKind`, `addKind`/`removeKind`, `changeKind`, and the makers `changeCore(project, fields)`,
 * `addRecord(project, collection, record)`, `removeRecord(project, collection, id)`,
 * `changeRecord(project, collection, id, fields)` — each reads the before-values from the project; `changeCore` and
 * `changeRecord` return null when nothing would change.
 */
import { Fault } from '../../worker/check.ts'
import { identifier, oneOf, recordOf, refuse, someOf, whole } from './form.ts'
import type { Reader } from './form.ts'
import { collections, findRecord, nameOfRecord, needRecord, recordsOf, references } from './project.ts'
import type { Collection, Core, Project, Records } from './project.ts'
import { checkCoherent, coreFields, readStored, recordFields, restoreRecord, storeRecord } from './recordForms.ts'
import type { StoredRecord, StoredRecords } from './recordForms.ts'
import { sameJson } from './sameJson.ts'
import type { StepKind } from './stepKind.ts'

/** Sets fields of the core; `before` and `after` have the same keys. */
export interface CoreStep {
  readonly kind: 'core'
  readonly before: Readonly<Partial<Core>>
  readonly after: Readonly<Partial<Core>>
}

/** Puts a record into a collection at `index`, or takes it out from there. */
export interface RecordStep<Kind extends 'add' | 'remove'> {
  readonly kind: Kind
  readonly collection: Collection
  readonly index: number
  readonly record: StoredRecord
}
export type AddStep = RecordStep<'add'>
export type RemoveStep = RecordStep<'remove'>

/** Sets fields of one record; `before` and `after` have the same keys. Boundaries have their own kinds of step. */
export interface ChangeStep {
  readonly kind: 'change'
  readonly collection: Collection
  readonly id: string
  readonly before: Readonly<Partial<StoredRecord>>
  readonly after: Readonly<Partial<StoredRecord>>
}

type Fields = Record<string, unknown>

function pick(source: object, keys: readonly string[]): Fields {
  return Object.fromEntries(keys.map((key) => [key, (source as Fields)[key]]))
}

function checkBefore(what: string, current: object, before: object): void {
  const now = pick(current, Object.keys(before))
  if (sameJson(now, before)) return
  const key = Object.keys(before).find((name) => !sameJson(now[name], (before as Fields)[name]))
  throw new Fault('conflict', `${what}.${key ?? ''}`, key, `${what}.${key ?? ''} is not what this edit started from`)
}

/** One pair of before and after for two changes of the same thing, or null when the second does not continue the first. */
function mergeFields(first: FieldChange, second: FieldChange): FieldChange | null {
  const shared = Object.keys(second.before).filter((key) => Object.hasOwn(first.after, key))
  if (!sameJson(pick(first.after, shared), pick(second.before, shared))) return null
  return { before: { ...second.before, ...first.before }, after: { ...first.after, ...second.after } }
}
interface FieldChange {
  before: object
  after: object
}

function checkSameKeys(at: string, before: object, after: object): void {
  if (!sameJson(Object.keys(before).sort(), Object.keys(after).sort())) {
    refuse(`${at}.after`, after, `an object with the keys of ${at}.before, ${Object.keys(before).join(', ')}`)
  }
}

export const coreKind: StepKind<CoreStep> = {
  apply(project, { before, after }) {
    checkBefore('core', project.core, before)
    return { ...project, core: { ...project.core, ...after } }
  },
  invert: ({ kind, before, after }) => ({ kind, before: after, after: before }),
  merge(first, second) {
    const fields = mergeFields(first, second)
    return fields && { kind: 'core', ...fields }
  },
  read(value, at) {
    const fields = someOf<Core>(coreFields)
    const step = recordOf<CoreStep>({ kind: oneOf('core'), before: fields, after: fields })(value, at)
    checkSameKeys(at, step.before, step.after)
    return step
  },
}

function withRecords(project: Project, collection: Collection, records: readonly Records[Collection][]): Project {
  return { ...project, [collection]: records }
}

/** Every record a record refers to must be in the project. */
export function checkReferences(project: Project, collection: Collection, record: object): void {
  for (const [field, target] of Object.entries(references[collection])) {
    needRecord(project, target, (record as Record<string, string>)[field])
  }
}

/** A record that others refer to cannot go before them. */
function checkUnreferenced(project: Project, collection: Collection, id: string): void {
  for (const other of collections) {
    for (const [field, target] of Object.entries(references[other])) {
      if (target !== collection) continue
      const user = recordsOf(project, other).find((record) => (record as unknown as Fields)[field] === id)
      if (user) {
        const message = `${nameOfRecord(collection)} "${id}" still has the ${nameOfRecord(other)} "${user.id}"; remove that first`
        throw new Fault('conflict', nameOfRecord(collection), id, message)
      }
    }
  }
}

function insert(project: Project, { collection, index, record }: RecordStep<'add' | 'remove'>): Project {
  const records = recordsOf(project, collection)
  if (findRecord(project, collection, record.id)) {
    const message = `the project already has a ${nameOfRecord(collection)} "${record.id}"`
    throw new Fault('conflict', nameOfRecord(collection), record.id, message)
  }
  if (index > records.length) {
    throw new Fault(
      'conflict',
      'index',
      index,
      `${collection} has ${records.length} records; none can go in at ${index}`,
    )
  }
  checkReferences(project, collection, record)
  return withRecords(
    project,
    collection,
    records.toSpliced(index, 0, restoreRecord(collection, record, nameOfRecord(collection))),
  )
}

function takeOut(project: Project, { collection, index, record }: RecordStep<'add' | 'remove'>): Project {
  const records = recordsOf(project, collection)
  const present = index < records.length ? storeRecord(collection, records[index]) : null
  if (!sameJson(present, record)) {
    const message = `${nameOfRecord(collection)} "${record.id}" is not what this edit started from`
    throw new Fault('conflict', nameOfRecord(collection), record.id, message)
  }
  checkUnreferenced(project, collection, record.id)
  return withRecords(project, collection, records.toSpliced(index, 1))
}

function readRecordStep<Kind extends 'add' | 'remove'>(kind: Kind): Reader<RecordStep<Kind>> {
  return (value, at) => {
    const collection = collectionOf(value, at)
    return recordOf<RecordStep<Kind>>({
      kind: oneOf(kind),
      collection: oneOf(collection),
      index: whole(0, 1e6),
      record: readStored(collection),
    })(value, at)
  }
}

function collectionOf(value: unknown, at: string): Collection {
  return oneOf(...collections)((value as Fields | null)?.collection, `${at}.collection`)
}

export const addKind: StepKind<AddStep | RemoveStep> = {
  apply: insert,
  invert: (step) => ({ ...step, kind: 'remove' }),
  merge: () => null,
  read: readRecordStep('add'),
}

export const removeKind: StepKind<AddStep | RemoveStep> = {
  apply: takeOut,
  invert: (step) => ({ ...step, kind: 'add' }),
  merge: () => null,
  read: readRecordStep('remove'),
}

/** Fields that a change must leave alone: the id for good, the rest because they have their own kinds of step. */
const ownSteps: readonly string[] = ['id', 'layers', 'checkedTo']

function readFields<C extends Collection>(collection: C): Reader<Partial<StoredRecords[C]>> {
  const changeable = Object.entries(recordFields[collection]).filter(([key]) => !ownSteps.includes(key))
  return someOf(Object.fromEntries(changeable) as unknown as (typeof recordFields)[C])
}

export const changeKind: StepKind<ChangeStep> = {
  apply(project, { collection, id, before, after }) {
    const current = needRecord(project, collection, id)
    checkBefore(`${nameOfRecord(collection)} "${id}"`, current, before)
    const changed = { ...current, ...after } as Records[Collection]
    checkReferences(project, collection, changed)
    // Only fields with the same form in memory and in JSON can change here, so the record may be checked as it is.
    checkCoherent(collection, changed as StoredRecord, nameOfRecord(collection))
    const records: readonly Records[Collection][] = recordsOf(project, collection)
    return withRecords(
      project,
      collection,
      records.map((record) => (record === current ? changed : record)),
    )
  },
  invert: (step) => ({ ...step, before: step.after, after: step.before }),
  merge(first, second) {
    if (first.collection !== second.collection || first.id !== second.id) return null
    const fields = mergeFields(first, second)
    return fields && { kind: 'change', collection: first.collection, id: first.id, ...fields }
  },
  read(value, at) {
    const collection = collectionOf(value, at)
    const fields = readFields(collection)
    const step = recordOf<ChangeStep>({
      kind: oneOf('change'),
      collection: oneOf(collection),
      id: identifier,
      before: fields,
      after: fields,
    })(value, at)
    checkSameKeys(at, step.before, step.after)
    return step
  },
}

/** The step that sets fields of the core; null when they already have these values. Throws a Fault for a bad value. */
export function changeCore(project: Project, fields: Partial<Core>): CoreStep | null {
  const after = changedFields(project.core, someOf<Core>(coreFields)(fields, 'core'))
  return after && { kind: 'core', before: pick(project.core, Object.keys(after)), after }
}

function changedFields(current: object, fields: object): Fields | null {
  const changed = Object.entries(fields).filter(([key, value]) => !sameJson((current as Fields)[key], value))
  return changed.length > 0 ? Object.fromEntries(changed) : null
}

/** The step that adds a record at the end of its collection. Throws a Fault for a record of the wrong form. */
export function addRecord<C extends Collection>(project: Project, collection: C, record: Records[C]): AddStep {
  const stored = readStored(collection)(storeRecord(collection, record), nameOfRecord(collection))
  return { kind: 'add', collection, index: project[collection].length, record: stored }
}

/** The step that removes a record. Throws a Fault when it is not there. */
export function removeRecord(project: Project, collection: Collection, id: string): RemoveStep {
  const records: readonly Records[Collection][] = recordsOf(project, collection)
  const record = needRecord(project, collection, id)
  return { kind: 'remove', collection, index: records.indexOf(record), record: storeRecord(collection, record) }
}

/**
 * The step that sets fields of a record; null when they already have these values.
 * Throws a Fault when the record is not there or a value is not of the right form.
 */
export function changeRecord<C extends Collection>(
  project: Project,
  collection: C,
  id: string,
  fields: Partial<StoredRecords[C]>,
): ChangeStep | null {
  const current = needRecord(project, collection, id)
  const after = changedFields(current, readFields(collection)(fields, nameOfRecord(collection)))
  if (!after) return null
  checkCoherent(collection, { ...current, ...after } as unknown as StoredRecords[C], nameOfRecord(collection))
  return { kind: 'change', collection, id, before: pick(current, Object.keys(after)), after }
}
