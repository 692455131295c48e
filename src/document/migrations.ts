/**
 * Old project files forward, one version of the schema at a time. Each migration turns the JSON of version n, as read and
 * not yet checked, into that of version n + 1; the check by parseProject and readTransaction follows.
 *
 * Exports: `migrateProject(json)`, `migrateTransaction(json, schema)`, `checkSchema(schema)`.
 */
import { Fault, describe } from '../../worker/check.ts'
import { currentSchema } from './project.ts'

export interface Migration {
  project(json: unknown): unknown
  transaction(json: unknown): unknown
}

/** From the schema of the key to the next one. */
export type Migrations = Readonly<Record<number, Migration>>

/** None yet: the first schema is the current one. */
export const migrations: Migrations = {}

/** Throws a Fault for a schema this program cannot read. */
export function checkSchema(schema: unknown, current = currentSchema): number {
  if (typeof schema !== 'number' || !Number.isInteger(schema) || schema < 1) {
    throw new Fault('format', 'schema', schema, `schema must be a whole number from 1; it is ${describe(schema)}`)
  }
  if (schema > current) {
    const message =
      `this project has schema ${schema}, written by a newer Winterclay; this one reads schemas up to ${current}. ` +
      'Update Winterclay and open the project again; nothing was changed'
    throw new Fault('unsupported', 'schema', schema, message)
  }
  return schema
}

function forward(json: unknown, schema: number, what: keyof Migration, table: Migrations, current: number): unknown {
  let result = json
  for (let version = schema; version < current; version++) {
    const migration = table[version] as Migration | undefined
    if (!migration) throw new Error(`no migration from schema ${version}`)
    result = migration[what](result)
  }
  return result
}

/** The JSON of a project in the current schema; reads the schema it has from its own field. */
export function migrateProject(json: unknown, table = migrations, current = currentSchema): unknown {
  const schema =
    typeof json === 'object' && json !== null && Object.hasOwn(json, 'schema') ? json : { schema: undefined }
  return forward(json, checkSchema((schema as { schema: unknown }).schema, current), 'project', table, current)
}

/** The JSON of a transaction written under `schema`, in the current schema. */
export function migrateTransaction(
  json: unknown,
  schema: number,
  table = migrations,
  current = currentSchema,
): unknown {
  return forward(json, checkSchema(schema, current), 'transaction', table, current)
}
