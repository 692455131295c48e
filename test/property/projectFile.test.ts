import { describe, expect, it } from 'vitest'
import { need } from '../../src/document/outcome.ts'
import { parseProject, projectToJson } from '../../src/document/parseProject.ts'
import { applyEdit } from '../../src/document/state.ts'
import type { WorkbenchState } from '../../src/document/state.ts'
import { openProjectFile, saveProjectFile } from '../../src/session/projectFile.ts'
import { Fault } from '../../worker/check.ts'
import { seededRandom } from '../../worker/random.ts'
import type { Random } from '../../worker/random.ts'
import { stampAt, startedState } from '../fixtures/project.ts'
import { randomEdit } from '../fixtures/randomEdits.ts'
import { bytesOf, pack, sha256, textOf, unpack } from '../fixtures/zipParts.ts'

/** How many mutations of each kind; the whole bar of 10,000 is run by hand. */
const mutations = Number(process.env.WINTERCLAY_MUTATIONS ?? 200)

function worked(seed: number, acts: number): WorkbenchState {
  const random = seededRandom(seed)
  let state = startedState()
  for (let i = 0; i < acts; i++) {
    const { edit } = randomEdit(state, random)
    if (edit === null || edit instanceof Fault || edit.steps.length === 0) continue
    state = need(applyEdit(state, edit, stampAt(state.version))).state
  }
  return state
}

const hostileValues: readonly unknown[] = [
  ...[null, true, -1, 1e308, 0.5, '', 'x', '__proto__', '\u0000', '../..', 'a'.repeat(100_000), [], {}, [[]]],
  ...[{ length: 3 }, [null], { __proto__: null }, Number.MAX_SAFE_INTEGER, 4294967296],
]

interface Place {
  holder: Record<string, unknown> | unknown[]
  key: string | number
}

function placesIn(json: unknown, found: Place[] = []): Place[] {
  if (typeof json !== 'object' || json === null) return found
  const holder = json as Record<string, unknown>
  for (const key of Object.keys(holder)) {
    found.push({ holder, key })
    placesIn(holder[key], found)
  }
  return found
}

/** Changes one thing in a JSON value, anywhere; returns what it did, for a failing test to say. */
function mutate(json: unknown, random: Random): string {
  const places = placesIn(json)
  const { holder, key } = places[random.below(places.length)]
  const target = holder as Record<string | number, unknown>
  switch (random.below(4)) {
    case 0: {
      const value = hostileValues[random.below(hostileValues.length)]
      target[key] = value
      return `${key} = ${JSON.stringify(value).slice(0, 40)}`
    }
    case 1:
      if (Array.isArray(holder)) holder.splice(Number(key), 1)
      else Reflect.deleteProperty(holder, key)
      return `without ${key}`
    case 2: {
      const other = places[random.below(places.length)]
      const moved = structuredClone((other.holder as Record<string | number, unknown>)[other.key])
      target[key] = moved
      return `${key} = what ${other.key} is`
    }
    default:
      Object.defineProperty(target, ['__proto__', 'constructor', 'more'][random.below(3)], {
        value: { polluted: 1 },
        enumerable: true,
        configurable: true,
      })
      return `a key more beside ${key}`
  }
}

describe('parseProject', () => {
  it('answers every mutation of a project with a Fault or with a project that is sound', () => {
    const state = worked(3, 60)
    const text = JSON.stringify(projectToJson(state.project))
    let refused = 0
    for (let seed = 1; seed <= 3 * mutations; seed++) {
      const json: unknown = JSON.parse(text)
      const what = `seed ${seed}: ${mutate(json, seededRandom(seed))}`
      const outcome = parseProject(json)
      if (outcome instanceof Fault) {
        refused++
        expect(outcome.message.length, what).toBeGreaterThan(10)
        continue
      }
      // Whatever is taken in comes back the same: nothing half-read.
      expect(need(parseProject(JSON.parse(JSON.stringify(projectToJson(outcome))))), what).toEqual(outcome)
    }
    expect(refused).toBeGreaterThan(1.5 * mutations)
    expect(({} as { polluted?: number }).polluted).toBeUndefined()
  })
})

describe('openProjectFile', () => {
  it('answers every damaged file with a Fault, or with the very state that was saved', async () => {
    const state = worked(4, 40)
    const whole = new Uint8Array(await (await saveProjectFile(state)).arrayBuffer())
    let refused = 0
    for (let seed = 1; seed <= mutations; seed++) {
      const random = seededRandom(seed)
      let bytes = Uint8Array.from(whole)
      const kind = random.below(4)
      const at = random.below(bytes.length)
      if (kind === 0) bytes[at] ^= 1 << random.below(8)
      else if (kind === 1) bytes = bytes.slice(0, at)
      else if (kind === 2) bytes.fill(random.below(256), at, at + 1 + random.below(64))
      else {
        const from = random.below(bytes.length)
        bytes.copyWithin(at, from, from + random.below(200))
      }
      const outcome = await openProjectFile(new Blob([bytes]))
      if (outcome instanceof Fault) refused++
      else expect(outcome.state, `seed ${seed}`).toEqual(state)
    }
    expect(refused).toBeGreaterThan(0.75 * mutations)
  })

  it('answers every mutation of project.json and of the journal, hashes mended, with a Fault or a sound state', async () => {
    const state = worked(5, 40)
    const members = await unpack(await saveProjectFile(state))
    for (let seed = 1; seed <= mutations; seed++) {
      const random = seededRandom(seed)
      const manifest = JSON.parse(textOf(members['project.json'])) as { members: { path: string; sha256: string }[] }
      let what: string
      const altered = { ...members }
      if (seed % 2 === 0) what = mutate(manifest, random)
      else {
        const lines = textOf(members['journal.jsonl']).trimEnd().split('\n')
        const row = random.below(lines.length)
        const json: unknown = JSON.parse(lines[row])
        what = `line ${row + 1}, ${mutate(json, random)}`
        lines[row] = JSON.stringify(json)
        altered['journal.jsonl'] = bytesOf(`${lines.join('\n')}\n`)
        manifest.members.find(({ path }) => path === 'journal.jsonl')!.sha256 = await sha256(altered['journal.jsonl'])
      }
      altered['project.json'] = bytesOf(JSON.stringify(manifest))
      const outcome = await openProjectFile(pack(altered))
      if (!(outcome instanceof Fault)) expect(outcome.state, `seed ${seed}: ${what}`).toEqual(state)
    }
    expect(({} as { polluted?: number }).polluted).toBeUndefined()
  })
})
