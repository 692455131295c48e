import { describe, expect, it } from 'vitest'
import { decodeRecord, decodeSnapshot, encodeRecord, encodeSnapshot, Journal } from '../../../src/document/journal.ts'
import { migrateProject, migrateTransaction } from '../../../src/document/migrations.ts'
import type { Migrations } from '../../../src/document/migrations.ts'
import { need } from '../../../src/document/outcome.ts'
import { projectToJson } from '../../../src/document/parseProject.ts'
import { recover } from '../../../src/document/recover.ts'
import { crc32 } from '../../../src/document/crc32.ts'
import { attempt } from '../../../src/document/outcome.ts'
import { readTransaction } from '../../../src/document/transaction.ts'
import { countedState } from '../../fixtures/project.ts'

const state = countedState([10, 20])
const lines = state.journal.slice(1).map(encodeRecord)

describe('crc32', () => {
  it('gives the check value of the standard, in one piece or in two', () => {
    // "123456789" -> cbf43926: the check value of CRC-32/ISO-HDLC (Koopman & Chakravarty 2004 list the polynomial).
    const bytes = new TextEncoder().encode('123456789')
    expect(crc32(bytes).toString(16)).toBe('cbf43926')
    expect(crc32(bytes.subarray(4), crc32(bytes.subarray(0, 4))).toString(16)).toBe('cbf43926')
  })
})

describe('a record of the journal', () => {
  it('is one line of JSON and survives it', () => {
    for (const [i, line] of lines.entries()) {
      expect(line).not.toContain('\n')
      expect(JSON.parse(line)).toHaveProperty('checksum')
      expect(need(decodeRecord(line))).toEqual(state.journal.at(i + 1))
    }
  })

  it('is refused when cut anywhere or when any one character was altered', () => {
    const line = lines[3]
    for (let at = 0; at < line.length; at++) {
      const refused = { message: 'this transaction is torn or was altered: its checksum does not fit its content' }
      expect(decodeRecord(line.slice(0, at))).toMatchObject(refused)
      const altered = line.slice(0, at) + String.fromCharCode(line.charCodeAt(at) ^ 1) + line.slice(at + 1)
      expect(decodeRecord(altered), altered).toMatchObject(refused)
    }
  })

  it('is refused when whole but not of the right form', () => {
    const good = state.journal.at(1)!
    const message = (json: object) => attempt(() => readTransaction({ ...good, ...json }, 'transaction'))
    expect(message({ base: 5 })).toMatchObject({ message: 'transaction.base must be one before seq, 1; it is 5' })
    expect(message({ steps: [] })).toMatchObject({
      message: 'transaction.steps must be a list of at least 1; it is Array of 0',
    })
    expect(message({ userEvent: 'Drop Table' })).toMatchObject({
      message: 'transaction.userEvent must be words joined by dots; it is "Drop Table"',
    })
    expect(message({ userEvent: 'undo' })).toMatchObject({
      message: 'transaction.reverts must be given in an undo or redo, and in nothing else; it is undefined',
    })
    expect(message({ seq: 9, base: 8, userEvent: 'undo', reverts: { from: 4, to: 9 } })).toMatchObject({
      message: 'transaction.reverts must be an ascending range before 9; it is "4 to 9"',
    })
    expect(message({ time: NaN })).toMatchObject({
      message: 'transaction.time must be a whole number from 0 to 8640000000000000; it is NaN',
    })
    expect(message({ extra: 1 })).toMatchObject({
      message:
        'transaction has an unknown key "extra"; known are seq, base, userEvent, time, author, steps, cause, reverts',
    })
  })
})

describe('Journal', () => {
  it('takes only the next transaction', () => {
    expect(() => Journal.startingAt(5).append(state.journal.at(1)!)).toThrow('the journal is at 5; it cannot take 1')
  })

  it('knows what it holds when it does not begin at the beginning', () => {
    const journal = Journal.startingAt(2).append(state.journal.at(3)!).append(state.journal.at(4)!)
    expect([journal.since, journal.version, journal.length]).toEqual([2, 4, 2])
    expect(journal.at(2)).toBeUndefined()
    expect(journal.at(3)).toBe(state.journal.at(3))
    expect(journal.slice(1).map(({ seq }) => seq)).toEqual([3, 4])
    expect(journal.slice(4, 9).map(({ seq }) => seq)).toEqual([4])
  })
})

describe('recover', () => {
  const kept = lines.map((line, i) => ({ seq: i + 1, schema: 1, line }))
  const snapshot = { version: 4, line: encodeSnapshot(state) }

  it('arrives at the same state with and without a snapshot, in whatever order the records come', () => {
    expect(recover({ id: 'project-1', records: kept.toReversed(), snapshots: [] })).toEqual({ state, dropped: [] })
    expect(recover({ id: 'project-1', records: kept, snapshots: [snapshot] })).toEqual({ state, dropped: [] })
  })

  it('stops before a missing record and says so', () => {
    const records = kept.filter(({ seq }) => seq !== 3)
    const { state: found, dropped } = recover({ id: 'project-1', records, snapshots: [] })
    expect(found.version).toBe(2)
    expect(dropped).toEqual([{ what: 'record', seq: 4, reason: 'record 3 is missing' }])
  })

  it('stops before a record whose edit does not fit, however sound its checksum', () => {
    const alien = state.journal.at(4)!
    const line = encodeRecord({ ...alien, steps: [{ kind: 'check', count: 'count-1', before: 9, after: 10 }] })
    const records = [...kept.slice(0, 3), { seq: 4, schema: 1, line }]
    expect(recover({ id: 'project-1', records, snapshots: [] }).dropped).toEqual([
      { what: 'record', seq: 4, reason: 'count-1 is checked to 0 px, not to 9 px from where this edit started' },
    ])
  })

  it('does not take the snapshot of another project for this one', () => {
    const { dropped } = recover({ id: 'project-2', records: kept, snapshots: [snapshot] })
    expect(dropped).toEqual([{ what: 'snapshot', seq: 4, reason: 'this snapshot is of project "project-1"' }])
  })

  it('drops nothing of what a newer program wrote, but says that it cannot read it', () => {
    const newer = kept.map((record) => ({ ...record, schema: 2 }))
    expect(() => recover({ id: 'project-1', records: newer, snapshots: [] })).toThrow(
      'this project has schema 2, written by a newer Winterclay; this one reads schemas up to 1',
    )
  })
})

describe('a snapshot', () => {
  it('is refused when altered', () => {
    const line = encodeSnapshot(state)
    expect(need(decodeSnapshot(line))).toEqual({ version: 4, project: state.project })
    expect(decodeSnapshot(line.replace('"position":[10', '"position":[11'))).toMatchObject({
      message: 'this snapshot is torn or was altered: its checksum does not fit its content',
    })
  })
})

describe('migrations', () => {
  /** Two invented steps forward: `lake` became `water`, then moved into a list. */
  const table: Migrations = {
    1: {
      project: (json) => ({ ...(json as object), schema: 2, water: (json as { lake: string }).lake }),
      transaction: (json) => ({ ...(json as object), two: true }),
    },
    2: {
      project: (json) => ({ ...(json as object), schema: 3, waters: [(json as { water: string }).water] }),
      transaction: (json) => ({ ...(json as object), three: true }),
    },
  }

  it('bring a project and its transactions forward one version at a time', () => {
    expect(migrateProject({ schema: 1, lake: 'Tarn' }, table, 3)).toMatchObject({
      schema: 3,
      water: 'Tarn',
      waters: ['Tarn'],
    })
    expect(migrateProject({ schema: 2, water: 'Mere' }, table, 3)).toEqual({
      schema: 3,
      water: 'Mere',
      waters: ['Mere'],
    })
    expect(migrateTransaction({ seq: 1 }, 1, table, 3)).toEqual({ seq: 1, two: true, three: true })
    expect(migrateTransaction({ seq: 1 }, 3, table, 3)).toEqual({ seq: 1 })
  })

  it('leave a project of the current schema alone', () => {
    const json = projectToJson(state.project)
    expect(migrateProject(json)).toBe(json)
  })

  it('refuse a newer schema naming both and what to do, and one that is none', () => {
    const message = (schema: unknown) => attempt(() => migrateProject({ schema }, table, 3))
    expect(message(7)).toMatchObject({
      code: 'unsupported',
      message:
        'this project has schema 7, written by a newer Winterclay; this one reads schemas up to 3. ' +
        'Update Winterclay and open the project again; nothing was changed',
    })
    for (const schema of [0, 1.5, NaN, '1', null, undefined]) {
      expect(message(schema)).toMatchObject({ code: 'format', field: 'schema' })
    }
    expect(attempt(() => migrateProject(null))).toMatchObject({
      message: 'schema must be a whole number from 1; it is undefined',
    })
  })
})
