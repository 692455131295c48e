import { describe, expect, it } from 'vitest'
import { redo, undo } from '../../src/document/history.ts'
import { decodeRecord, decodeSnapshot, encodeRecord, encodeSnapshot } from '../../src/document/journal.ts'
import { minimalGap } from '../../src/document/layerSet.ts'
import { need } from '../../src/document/outcome.ts'
import { parseProject, projectToJson } from '../../src/document/parseProject.ts'
import type { Project } from '../../src/document/project.ts'
import { applyEdit, applyTransaction, newState, replay } from '../../src/document/state.ts'
import type { WorkbenchState } from '../../src/document/state.ts'
import { applyStep, mergeAll, stepKinds } from '../../src/document/steps.ts'
import { Fault } from '../../worker/check.ts'
import { seededRandom } from '../../worker/random.ts'
import { stampAt, startedState } from '../fixtures/project.ts'
import { proveMerge, proveStep } from '../fixtures/proveStep.ts'
import { randomEdit, verbNames } from '../fixtures/randomEdits.ts'

const walks = 10
const length = 120

function checkLayers(project: Project, hint: string): void {
  for (const { layers } of project.counts) {
    expect(new Set(layers.id).size, `${hint}: an id twice`).toBe(layers.id.length)
    for (let i = 1; i < layers.position.length; i++) {
      expect(layers.position[i] - layers.position[i - 1], `${hint}: order or gap`).toBeGreaterThanOrEqual(minimalGap)
    }
  }
}

/** Random acts from a started project; `each` sees every edit that was made. */
function walk(
  seed: number,
  each?: (state: WorkbenchState, next: WorkbenchState, name: string) => void,
): WorkbenchState {
  const random = seededRandom(seed)
  let state = startedState()
  for (let i = 0; i < length; i++) {
    const { name, edit } = randomEdit(state, random)
    if (edit === null || edit instanceof Fault || edit.steps.length === 0) continue
    const outcome = applyEdit(state, edit, stampAt(state.version))
    // A command must refuse what cannot be done, not hand out steps that fail.
    if (outcome instanceof Fault) throw new Error(`seed ${seed}, ${name}: ${outcome.message}`)
    each?.(state, outcome.state, name)
    state = outcome.state
  }
  return state
}

describe('every kind of step, over random walks', () => {
  it('applies, inverts to identity and survives JSON', () => {
    const kinds = new Set<string>()
    const names = new Set<string>()
    for (let seed = 1; seed <= walks; seed++) {
      walk(seed, (state, next, name) => {
        names.add(name)
        let project = state.project
        for (const step of next.journal.last!.steps) {
          kinds.add(step.kind)
          project = proveStep(project, step, `seed ${seed}, ${name} at ${state.version}`)
        }
        expect(project).toEqual(next.project)
        checkLayers(project, `seed ${seed}, ${name}`)
      })
    }
    expect([...kinds].sort()).toEqual([...stepKinds].sort())
    expect([...names].sort()).toEqual([...verbNames].sort())
  })

  it('merges neighbours only into what they do one after the other', () => {
    const merged = new Set<string>()
    for (let seed = 1; seed <= 2 * walks; seed++) {
      const { journal } = walk(seed)
      const steps = journal.slice(1).flatMap((transaction) => transaction.steps)
      let project = newState('project-1').project
      steps.forEach((step, i) => {
        const next = steps.at(i + 1)
        const both = next && proveMerge(project, step, next, `seed ${seed}, step ${i}`)
        if (both) merged.add(both.kind)
        project = need(applyStep(project, step))
      })
      let short = newState('project-1').project
      for (const step of mergeAll(steps)) short = need(applyStep(short, step))
      expect(short, `seed ${seed}: all merged`).toEqual(project)
    }
    // Every kind by itself: test/unit/document/steps.test.ts.
    expect(merged).toContain('place')
    expect(merged).toContain('mark')
  })
})

describe('a document, over random walks', () => {
  it('is the same when replayed from its journal, live or from its lines', () => {
    for (let seed = 1; seed <= walks; seed++) {
      const state = walk(seed)
      const lines = state.journal.slice(1).map(encodeRecord)
      const transactions = lines.map((line) => need(decodeRecord(line)))
      expect(transactions, `seed ${seed}`).toEqual(state.journal.slice(1))
      expect(need(replay(newState('project-1'), transactions)), `seed ${seed}`).toEqual(state)
    }
  })

  it('survives JSON and a snapshot', () => {
    for (let seed = 1; seed <= walks; seed++) {
      const { project, version } = walk(seed)
      expect(need(parseProject(JSON.parse(JSON.stringify(projectToJson(project)))))).toEqual(project)
      expect(need(decodeSnapshot(encodeSnapshot({ project, version })))).toEqual({ project, version })
    }
  })

  it('is back at every earlier project when undone step by step, and at the last when redone', () => {
    for (let seed = 1; seed <= walks; seed++) {
      const past: Project[] = []
      let state = walk(seed, (before) => past.push(before.project))
      const last = state.project
      for (const earlier of past.toReversed()) {
        state = need(applyTransaction(state, undo(state, stampAt(state.version))!))
        expect(state.project, `seed ${seed}, undo at ${state.version}`).toEqual(earlier)
      }
      for (let i = 0; i < past.length; i++) {
        state = need(applyTransaction(state, redo(state, stampAt(state.version))!))
      }
      expect(state.project, `seed ${seed}, all redone`).toEqual(last)
      expect(redo(state, stampAt(0)), `seed ${seed}: nothing left to redo`).toBeNull()
    }
  })

  it('follows a plain pair of stacks through any mixture of acts, undo and redo', () => {
    for (let seed = 100; seed < 100 + walks; seed++) {
      const random = seededRandom(seed)
      let state = startedState()
      const done: Project[] = []
      let undone: Project[] = []
      // The three edits that set the project up can be undone too.
      let early = state.version
      for (let i = 0; i < 2 * length; i++) {
        const hint = `seed ${seed}, act ${i}`
        const choice = random.uniform()
        if (choice < 0.35) {
          const transaction = undo(state, stampAt(state.version))
          if (done.length === 0 && early === 0) expect(transaction, hint).toBeNull()
          if (!transaction || done.length === 0) continue
          undone.push(state.project)
          state = need(applyTransaction(state, transaction))
          expect(state.project, hint).toEqual(done.pop())
        } else if (choice < 0.6) {
          const transaction = redo(state, stampAt(state.version))
          if (undone.length === 0) expect(transaction, hint).toBeNull()
          if (!transaction) continue
          done.push(state.project)
          state = need(applyTransaction(state, transaction))
          expect(state.project, hint).toEqual(undone.pop())
        } else {
          const { edit } = randomEdit(state, random)
          if (edit === null || edit instanceof Fault || edit.steps.length === 0) continue
          done.push(state.project)
          undone = []
          early = 3
          state = need(applyEdit(state, edit, stampAt(state.version))).state
        }
      }
      expect(need(replay(newState('project-1'), state.journal.slice(1))), `seed ${seed}: replay`).toEqual(state)
    }
  })
})
