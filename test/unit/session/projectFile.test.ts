import { deflateSync } from 'fflate'
import { describe, expect, it } from 'vitest'
import { markBoundaries } from '../../../src/commands/markBoundaries.ts'
import { markSpan } from '../../../src/commands/markSpan.ts'
import { placeBoundary } from '../../../src/commands/placeBoundary.ts'
import { redo, undo } from '../../../src/document/history.ts'
import { need } from '../../../src/document/outcome.ts'
import { applyTransaction } from '../../../src/document/state.ts'
import type { WorkbenchState } from '../../../src/document/state.ts'
import { openProjectFile, saveProjectFile } from '../../../src/session/projectFile.ts'
import type { PackedScan } from '../../../src/session/projectFile.ts'
import { Fault } from '../../../worker/check.ts'
import { seededRandom } from '../../../worker/random.ts'
import { after, countedState, stampAt } from '../../fixtures/project.ts'
import { bytesOf, pack, sha256, textOf, unpack } from '../../fixtures/zipParts.ts'

/** A worked-on project whose last act was undone. */
function workedState(): WorkbenchState {
  let state = countedState([10, 20, 30, 40, 50])
  state = after(state, markBoundaries(state, { count: 'count-1', ids: [2], mark: 'doubtful' }))
  state = after(
    state,
    markSpan(state, { transect: 'transect-1', from: 60, to: 70, kind: 'event', note: '=flood, "1953"' }),
  )
  state = after(state, placeBoundary(state, { count: 'count-1', position: 80 }))
  return need(applyTransaction(state, undo(state, stampAt(state.version))!))
}

async function someScan(): Promise<PackedScan> {
  const random = seededRandom(5)
  const bytes = Uint8Array.from({ length: 50_000 }, () => random.below(256))
  return { sha256: await sha256(bytes), name: 'lake-1.tif', file: new Blob([bytes]) }
}

async function refusal(file: Blob): Promise<string> {
  const opened = await openProjectFile(file)
  expect(opened).toBeInstanceOf(Fault)
  return (opened as Fault).message
}

/** Alters project.json by its JSON, all hashes kept. */
async function withManifest(file: Blob, alter: (manifest: Record<string, unknown>) => void): Promise<Blob> {
  const members = await unpack(file)
  const manifest = JSON.parse(textOf(members['project.json'])) as Record<string, unknown>
  alter(manifest)
  return pack({ ...members, 'project.json': bytesOf(JSON.stringify(manifest)) })
}

/** Replaces a member and its hash in project.json: a change by someone who knows the form. */
async function withMember(file: Blob, path: string, content: string): Promise<Blob> {
  const bytes = bytesOf(content)
  const hash = await sha256(bytes)
  const altered = await withManifest(file, (manifest) => {
    for (const member of manifest.members as { path: string; sha256: string }[])
      if (member.path === path) member.sha256 = hash
  })
  return pack({ ...(await unpack(altered)), [path]: bytes })
}

describe('a project file', () => {
  it('gives back the same state with its undo history', async () => {
    const state = workedState()
    const opened = need(await openProjectFile(await saveProjectFile(state)))
    expect(opened.state).toEqual(state)
    expect(opened.scans).toEqual([])
    const again = need(applyTransaction(opened.state, redo(opened.state, stampAt(99))!))
    expect(again.project.counts[0].layers.position).toEqual(Float64Array.of(10, 20, 30, 40, 50, 80))
  })

  it('is the same bytes for the same content', async () => {
    const scan = await someScan()
    const [one, two] = [await saveProjectFile(workedState(), [scan]), await saveProjectFile(workedState(), [scan])]
    expect(new Uint8Array(await one.arrayBuffer())).toEqual(new Uint8Array(await two.arrayBuffer()))
  })

  it('carries scans on request, byte for byte', async () => {
    const scan = await someScan()
    const { scans } = need(await openProjectFile(await saveProjectFile(workedState(), [scan])))
    expect(scans.map(({ name, sha256: hash }) => [name, hash])).toEqual([['lake-1.tif', scan.sha256]])
    expect(await scans[0].file.arrayBuffer()).toEqual(await scan.file.arrayBuffer())
  })

  it('is an ordinary zip to others, and reads one that another program wrote', async () => {
    const state = workedState()
    const members = await unpack(await saveProjectFile(state, [await someScan()]))
    expect(Object.keys(members).slice(0, 4)).toEqual([
      'project.json',
      'journal.jsonl',
      'datapackage.json',
      'tables/sections.csv',
    ])
    expect(need(await openProjectFile(pack(members))).state).toEqual(state)
  })

  it('describes every column of every table in its data package, with bytes and hash', async () => {
    const members = await unpack(await saveProjectFile(workedState()))
    const { $schema, resources } = JSON.parse(textOf(members['datapackage.json'])) as {
      $schema: string
      resources: { path: string; bytes: number; hash: string; type: string; schema: { fields: { name: string }[] } }[]
    }
    expect($schema).toBe('https://datapackage.org/profiles/2.0/datapackage.json')
    expect(resources.map(({ path }) => path).sort()).toEqual(
      Object.keys(members)
        .filter((path) => path.endsWith('.csv'))
        .sort(),
    )
    for (const { path, bytes, hash, schema } of resources) {
      expect(bytes).toBe(members[path].length)
      expect(hash).toBe(`sha256:${await sha256(members[path])}`)
      expect(textOf(members[path]).split('\n')[0]).toBe(schema.fields.map(({ name }) => name).join(','))
    }
  })

  it('writes tables that say what the project says', async () => {
    const members = await unpack(await saveProjectFile(workedState()))
    const lines = textOf(members['tables/boundaries.csv']).split('\n')
    expect(lines[0]).toBe('count,boundary,boundary_px,depth_mm,mark,edit,author,time')
    expect(lines[2]).toBe('count-1,2,20,2,doubtful,5,A,2023-11-14T22:17:20.000Z')
    expect(textOf(members['tables/spans.csv']).split('\n')[1]).toBe(
      `span-1,transect-1,event,60,70,6,7,"'=flood, ""1953"""`,
    )
  })
})

describe('opening what is no sound project file', () => {
  it('says what an empty file, a picture and a cut-off file are', async () => {
    expect(await refusal(new Blob([]))).toBe('this file is empty, not a Winterclay project file')
    expect(await refusal(new Blob(['\x89PNG and so on, long enough to hold an end record']))).toBe(
      'this file is not a Winterclay project file (it is not a zip archive)',
    )
    const whole = await saveProjectFile(workedState())
    expect(await refusal(whole.slice(0, whole.size - 300))).toBe(
      'this project file is cut off: its end is missing. Copy or download it again; nothing was opened',
    )
  })

  it('says when a zip is something else', async () => {
    expect(await refusal(pack({ 'letter.txt': bytesOf('dear') }))).toBe(
      'this is not a Winterclay project file: it has a member named "letter.txt". Nothing was opened',
    )
    expect(await refusal(pack({ 'journal.jsonl': bytesOf('') }))).toBe(
      'this is not a Winterclay project file: it has no project.json',
    )
    expect(await refusal(pack({ 'project.json': bytesOf('{"form":"other"}') }))).toBe(
      'this is not a Winterclay project file: its project.json is of another kind',
    )
    expect(await refusal(pack({ 'project.json': bytesOf('{"form":') }))).toBe(
      'project.json in this project file is not JSON. Nothing was opened; use another copy of the file',
    )
  })

  it('names the member whose hash is wrong', async () => {
    const members = await unpack(await saveProjectFile(workedState(), [await someScan()]))
    for (const path of Object.keys(members)) {
      if (path === 'project.json') continue
      const altered = Uint8Array.from(members[path])
      altered[altered.length >> 1] ^= 1
      expect(await refusal(pack({ ...members, [path]: altered }))).toBe(
        `${path} in this project file does not have the SHA-256 that project.json gives for it: ` +
          'it was altered or damaged. Nothing was opened; use another copy of the file',
      )
    }
  })

  it('names a newer schema, the one it reads, and what to do', async () => {
    const newer = await withManifest(await saveProjectFile(workedState()), (manifest) => {
      manifest.schema = 2
      manifest.unheardOf = {}
    })
    expect(await refusal(newer)).toBe(
      'this project has schema 2, written by a newer Winterclay; this one reads schemas up to 1. ' +
        'Update Winterclay and open the project again; nothing was changed',
    )
  })

  it('names members that are missing or not listed', async () => {
    const members = await unpack(await saveProjectFile(workedState()))
    const { 'tables/notes.csv': _left, ...fewer } = members
    expect(await refusal(pack(fewer))).toBe(
      'tables/notes.csv in this project file is missing from the file. Nothing was opened; use another copy of the file',
    )
    expect(await refusal(pack({ ...members, 'tables/more.csv': bytesOf('') }))).toBe(
      'tables/more.csv in this project file is not listed in project.json. Nothing was opened; use another copy of the file',
    )
  })

  it.each(['../../etc/passwd', '/abs', 'C:\\x', 'tables/../project.json', 'scans/x', 'constructor', 'tables/'])(
    'refuses the path %s',
    async (path) => {
      const members = await unpack(await saveProjectFile(workedState()))
      expect(await refusal(pack({ ...members, [path]: bytesOf('x') }))).toBe(
        `this is not a Winterclay project file: it has a member named ${JSON.stringify(path)}. Nothing was opened`,
      )
    },
  )

  it('refuses hostile keys wherever they stand', async () => {
    const saved = await saveProjectFile(workedState())
    const members = await unpack(saved)
    const text = textOf(members['project.json'])
    for (const key of ['__proto__', 'constructor', 'toString']) {
      for (const place of ['"form"', '"mmPerPx"', '"lake"', '"position"']) {
        const hostile = text.replace(place, `"${key}":{"polluted":1},${place}`)
        expect(await refusal(pack({ ...members, 'project.json': bytesOf(hostile) }))).toContain(
          `has an unknown key "${key}"`,
        )
      }
    }
    expect(({} as { polluted?: number }).polluted).toBeUndefined()
  })

  it('refuses a journal that does not lead to the project', async () => {
    const saved = await saveProjectFile(workedState())
    const other = await withManifest(saved, (manifest) => {
      ;(manifest.project as { core: { lake: string } }).core.lake = 'Elsewhere'
    })
    expect(await refusal(other)).toBe(
      'journal.jsonl in this project file does not lead to the project in project.json. Nothing was opened; use another copy of the file',
    )
    const lines = textOf((await unpack(saved))['journal.jsonl']).split('\n')
    expect(await refusal(await withMember(saved, 'journal.jsonl', `${lines.slice(0, 4).join('\n')}\n`))).toBe(
      'journal.jsonl in this project file holds 4 edits after edit 0, not up to edit 8. Nothing was opened; use another copy of the file',
    )
    lines[2] = lines[2].replace('"author":"A"', '"author":"B"')
    expect(await refusal(await withMember(saved, 'journal.jsonl', lines.join('\n')))).toBe(
      'journal.jsonl line 3: this transaction is torn or was altered: its checksum does not fit its content',
    )
  })

  it('refuses a member that unfolds to more than it says, without unfolding it all', async () => {
    const bomb = deflateSync(new Uint8Array(5_000_000))
    const zip = new Uint8Array(await pack({ 'project.json': bomb }).arrayBuffer())
    // The bomb lies there stored; call it deflated to 100 bytes instead.
    const view = new DataView(zip.buffer)
    for (let at = 0; at + 4 <= zip.length; at++) {
      const signature = view.getUint32(at, true)
      if (signature !== 0x04034b50 && signature !== 0x02014b50) continue
      const shift = signature === 0x02014b50 ? 2 : 0
      if (view.getUint32(at + 22 + shift, true) === bomb.length) view.setUint32(at + 22 + shift, 100, true)
    }
    const answer = await refusal(new Blob([zip]))
    expect(answer).toBe('this project file is damaged: project.json unfolds to more than it says. Nothing was opened')
  })

  it('refuses a member that says it is larger than any project', async () => {
    const zip = new Uint8Array(await pack({ 'project.json': bytesOf('{}') }).arrayBuffer())
    const view = new DataView(zip.buffer)
    const central = zip.findLastIndex((_, at) => at + 4 <= zip.length && view.getUint32(at, true) === 0x02014b50)
    view.setUint32(central + 24, 300_000_000, true)
    expect(await refusal(new Blob([zip]))).toBe(
      'project.json in this project file says it holds 300000000 bytes, more than the 256000000 allowed. Nothing was opened',
    )
  })
})
