/**
 * A project to JSON and back. Reading is strict: unknown or missing keys, wrong types, numbers out of range, ids named
 * twice, references to what is not there and disordered boundaries are each a Fault that names the place.
 *
 * Exports: `parseProject(json)`, `projectToJson(project)`.
 */
import { Fault } from '../../worker/check.ts'
import { identifier, listOf, recordOf, whole } from './form.ts'
import type { Reader } from './form.ts'
import { migrateProject } from './migrations.ts'
import { attempt } from './outcome.ts'
import type { Outcome } from './outcome.ts'
import { collections, currentSchema, recordsOf } from './project.ts'
import type { Collection, Core, Project } from './project.ts'
import { coreFields, readStored, restoreRecord, storeRecord } from './recordForms.ts'
import type { StoredRecord, StoredRecords } from './recordForms.ts'
import { checkReferences } from './recordSteps.ts'

/** A project as JSON. */
export type StoredProject = Pick<Project, 'schema' | 'id' | 'core'> & {
  readonly [C in Collection]: readonly StoredRecords[C][]
}

const mostRecords: Record<Collection, number> = {
  sections: 2000,
  transects: 10_000,
  spans: 100_000,
  counters: 1000,
  counts: 10_000,
  dates: 10_000,
  notes: 100_000,
}

function records<C extends Collection>(collection: C): Reader<StoredRecords[C][]> {
  return listOf(readStored(collection), mostRecords[collection])
}

const readProject = recordOf<StoredProject>({
  schema: whole(currentSchema, currentSchema),
  id: identifier,
  core: recordOf<Core>(coreFields),
  sections: records('sections'),
  transects: records('transects'),
  spans: records('spans'),
  counters: records('counters'),
  counts: records('counts'),
  dates: records('dates'),
  notes: records('notes'),
})

export function projectToJson(project: Project): StoredProject {
  const stored: Record<string, unknown> = { schema: project.schema, id: project.id, core: project.core }
  for (const collection of collections) {
    stored[collection] = recordsOf(project, collection).map((record) => storeRecord(collection, record))
  }
  return stored as unknown as StoredProject
}

/** The project in this JSON, brought forward from older schemas; a Fault names what is wrong and where. */
export function parseProject(json: unknown): Outcome<Project> {
  return attempt(() => {
    const stored = readProject(migrateProject(json), '')
    const restored: Record<string, unknown> = { schema: stored.schema, id: stored.id, core: stored.core }
    for (const collection of collections) {
      const list: readonly StoredRecord[] = stored[collection]
      restored[collection] = list.map((record, i) => restoreRecord(collection, record, `${collection}[${i}]`))
    }
    const project = restored as unknown as Project
    for (const collection of collections) checkCollection(project, collection)
    return project
  })
}

function checkCollection(project: Project, collection: Collection): void {
  const seen = new Set<string>()
  recordsOf(project, collection).forEach((record, i) => {
    if (seen.has(record.id)) {
      const message = `${collection}[${i}].id "${record.id}" is already the id of another record`
      throw new Fault('format', `${collection}[${i}].id`, record.id, message)
    }
    seen.add(record.id)
    const outcome = attempt(() => checkReferences(project, collection, record))
    if (outcome instanceof Fault) {
      throw new Fault('format', `${collection}[${i}]`, outcome.value, `${collection}[${i}]: ${outcome.message}`)
    }
  })
}
