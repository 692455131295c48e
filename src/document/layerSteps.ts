/**
 * Edits of one count: its boundaries and how far it was checked. Every step carries the provenance (origin) of each
 * boundary before and after, so that taking it back restores that too.
 *
 * Exports: the step types, their kinds, and the makers `placeLayers(count, columns)`, `liftLayers(count, ids)`,
 * `moveLayers(count, ids, positions, origin)`, `markLayers(count, ids, marks, origin)`, `setChecked(count, to)` —
 * each reads the before-values from the count.
 */
import { Fault } from '../../worker/check.ts'
import { pathPixels } from '../../worker/units.ts'
import { identifier, listOf, oneOf, recordOf, refuse, whole, within } from './form.ts'
import type { Reader } from './form.ts'
import { indicesOfIds, lift, marks, move, pickColumns, place, remark } from './layerSet.ts'
import type { LayerColumns, LayerSet, Mark } from './layerSet.ts'
import { needRecord } from './project.ts'
import type { Count, Project } from './project.ts'
import { readColumns } from './recordForms.ts'
import { sameJson } from './sameJson.ts'
import type { StepKind } from './stepKind.ts'

/** Puts boundaries into a count, or lifts them out; columns sorted by position. */
export interface LayersStep<Kind extends 'place' | 'lift'> {
  readonly kind: Kind
  readonly count: string
  readonly layers: LayerColumns
}
export type PlaceStep = LayersStep<'place'>
export type LiftStep = LayersStep<'lift'>

interface Positions {
  readonly position: readonly number[]
  readonly origin: readonly number[]
}
/** Moves boundaries; all columns as long as `id`. */
export interface MoveStep {
  readonly kind: 'move'
  readonly count: string
  readonly id: readonly number[]
  readonly before: Positions
  readonly after: Positions
}

interface Marks {
  readonly mark: readonly Mark[]
  readonly origin: readonly number[]
}
/** Marks boundaries anew; all columns as long as `id`. */
export interface MarkStep {
  readonly kind: 'mark'
  readonly count: string
  readonly id: readonly number[]
  readonly before: Marks
  readonly after: Marks
}

/** Sets how far the count was checked, path pixels. */
export interface CheckStep {
  readonly kind: 'check'
  readonly count: string
  readonly before: number
  readonly after: number
}

function withCount(project: Project, id: string, change: (count: Count) => Partial<Count>): Project {
  const count = needRecord(project, 'counts', id)
  const changed = { ...count, ...change(count) }
  return { ...project, counts: project.counts.map((other) => (other === count ? changed : other)) }
}

function checkStart(count: Count, ids: readonly number[], expected: object, keys: readonly (keyof LayerColumns)[]) {
  const present = pickColumns(count.layers, indicesOfIds(count.layers, ids))
  for (const key of keys) {
    if (sameJson(present[key], (expected as LayerColumns)[key])) continue
    const odd = ids.findIndex((_, i) => present[key][i] !== (expected as LayerColumns)[key][i])
    const message = `boundary ${ids[odd]} of ${count.id} is not what this edit started from: its ${key} is ${present[key][odd]}`
    throw new Fault('conflict', 'boundary', ids[odd], message)
  }
}

function applyPlace(project: Project, step: PlaceStep | LiftStep): Project {
  return withCount(project, step.count, ({ layers }) => ({ layers: place(layers, step.layers) }))
}

function applyLift(project: Project, step: PlaceStep | LiftStep): Project {
  return withCount(project, step.count, (count) => {
    checkStart(count, step.layers.id, step.layers, ['position', 'mark', 'origin'])
    return { layers: lift(count.layers, step.layers.id) }
  })
}

/** The rows of two column sets together, sorted by position. */
function joinColumns(a: LayerColumns, b: LayerColumns): LayerColumns {
  const position = [...a.position, ...b.position]
  const order = position.map((_, i) => i).sort((i, j) => position[i] - position[j])
  const sorted = <T>(column: readonly T[]) => order.map((i) => column[i])
  return {
    id: sorted([...a.id, ...b.id]),
    position: sorted(position),
    mark: sorted([...a.mark, ...b.mark]),
    origin: sorted([...a.origin, ...b.origin]),
  }
}

function mergeLayers<S extends PlaceStep | LiftStep>(first: S, second: S): S | null {
  if (first.kind !== second.kind || first.count !== second.count) return null
  // The same boundary twice (placed, lifted elsewhere, placed again) is not one act.
  if (first.layers.id.some((id) => second.layers.id.includes(id))) return null
  return { ...first, layers: joinColumns(first.layers, second.layers) }
}

function readLayers<Kind extends 'place' | 'lift'>(kind: Kind): Reader<LayersStep<Kind>> {
  return (value, at) => {
    const step = recordOf<LayersStep<Kind>>({ kind: oneOf(kind), count: identifier, layers: readColumns })(value, at)
    if (step.layers.id.length === 0) refuse(`${at}.layers`, step.layers.id, 'at least one boundary')
    return step
  }
}

export const placeKind: StepKind<PlaceStep | LiftStep> = {
  apply: applyPlace,
  invert: (step) => ({ ...step, kind: 'lift' }),
  merge: mergeLayers,
  read: readLayers('place'),
}

export const liftKind: StepKind<PlaceStep | LiftStep> = {
  apply: applyLift,
  invert: (step) => ({ ...step, kind: 'place' }),
  merge: mergeLayers,
  read: readLayers('lift'),
}

type Columns = Readonly<Record<string, readonly unknown[]>>

/**
 * Joins two steps that change columns of boundaries by id: for a boundary both touch, before of the first and after of
 * the second; null when the second does not start where the first ended.
 */
function mergeColumns(first: ColumnChange, second: ColumnChange): ColumnChange | null {
  const keys = Object.keys(first.before)
  const id = [...first.id]
  const before: Record<string, unknown[]> = {}
  const after: Record<string, unknown[]> = {}
  for (const key of keys) {
    before[key] = [...first.before[key]]
    after[key] = [...first.after[key]]
  }
  const rowOf = new Map(first.id.map((number, row) => [number, row]))
  for (const [i, number] of second.id.entries()) {
    const row = rowOf.get(number) ?? id.push(number) - 1
    const known = rowOf.has(number)
    for (const key of keys) {
      if (known && after[key][row] !== second.before[key][i]) return null
      if (!known) before[key][row] = second.before[key][i]
      after[key][row] = second.after[key][i]
    }
  }
  return { id, before, after }
}
interface ColumnChange {
  id: readonly number[]
  before: Columns
  after: Columns
}

const ids = listOf(whole(1, 0xffffffff), 2_000_000)
const origins = listOf(whole(0, 0xffffffff), 2_000_000)

/** Every column of a step as long as its ids, of which there is at least one. */
function checkColumns(at: string, step: { id: readonly number[]; before: object; after: object }): void {
  if (step.id.length === 0) refuse(`${at}.id`, step.id, 'at least one boundary')
  for (const side of ['before', 'after'] as const) {
    for (const [key, column] of Object.entries(step[side]) as [string, readonly unknown[]][]) {
      if (column.length !== step.id.length) {
        refuse(`${at}.${side}.${key}`, column, `as long as ${at}.id, ${step.id.length}`)
      }
    }
  }
}

const readPositions = recordOf<Positions>({ position: listOf(within(0, 1e7), 2_000_000), origin: origins })

export const moveKind: StepKind<MoveStep> = {
  apply: (project, step) =>
    withCount(project, step.count, (count) => {
      checkStart(count, step.id, step.before, ['position', 'origin'])
      return { layers: move(count.layers, step.id, step.after.position, step.after.origin) }
    }),
  invert: (step) => ({ ...step, before: step.after, after: step.before }),
  merge(first, second) {
    if (first.count !== second.count) return null
    const joined = mergeColumns(plainColumns(first), plainColumns(second))
    return joined && ({ kind: 'move', count: first.count, ...joined } as unknown as MoveStep)
  },
  read(value, at) {
    const step = recordOf<MoveStep>({
      kind: oneOf('move'),
      count: identifier,
      id: ids,
      before: readPositions,
      after: readPositions,
    })(value, at)
    checkColumns(at, step)
    return step
  },
}

function plainColumns({ id, before, after }: MoveStep | MarkStep): ColumnChange {
  return { id, before: { ...before }, after: { ...after } }
}

const readMarks = recordOf<Marks>({ mark: listOf(oneOf(...marks), 2_000_000), origin: origins })

export const markKind: StepKind<MarkStep> = {
  apply: (project, step) =>
    withCount(project, step.count, (count) => {
      checkStart(count, step.id, step.before, ['mark', 'origin'])
      return { layers: remark(count.layers, step.id, step.after.mark, step.after.origin) }
    }),
  invert: (step) => ({ ...step, before: step.after, after: step.before }),
  merge(first, second) {
    if (first.count !== second.count) return null
    const joined = mergeColumns(plainColumns(first), plainColumns(second))
    return joined && ({ kind: 'mark', count: first.count, ...joined } as unknown as MarkStep)
  },
  read(value, at) {
    const step = recordOf<MarkStep>({
      kind: oneOf('mark'),
      count: identifier,
      id: ids,
      before: readMarks,
      after: readMarks,
    })(value, at)
    checkColumns(at, step)
    return step
  },
}

export const checkKind: StepKind<CheckStep> = {
  apply: (project, step) =>
    withCount(project, step.count, (count) => {
      if (count.checkedTo !== step.before) {
        const message = `${count.id} is checked to ${count.checkedTo} px, not to ${step.before} px from where this edit started`
        throw new Fault('conflict', 'checkedTo', count.checkedTo, message)
      }
      return { checkedTo: pathPixels(step.after) }
    }),
  invert: (step) => ({ ...step, before: step.after, after: step.before }),
  merge: (first, second) =>
    first.count === second.count && first.after === second.before ? { ...first, after: second.after } : null,
  read: recordOf<CheckStep>({
    kind: oneOf('check'),
    count: identifier,
    before: within(0, 1e7),
    after: within(0, 1e7),
  }),
}

/** The step that places boundaries, given in any order. */
export function placeLayers(count: Count, layers: LayerColumns): PlaceStep {
  const none: LayerColumns = { id: [], position: [], mark: [], origin: [] }
  return { kind: 'place', count: count.id, layers: joinColumns(layers, none) }
}

export function liftLayers(count: Count, boundaries: readonly number[]): LiftStep {
  const indices = indicesOfIds(count.layers, boundaries).sort((a, b) => a - b)
  return { kind: 'lift', count: count.id, layers: pickColumns(count.layers, indices) }
}

function startOf(layers: LayerSet, boundaries: readonly number[]): LayerColumns {
  return pickColumns(layers, indicesOfIds(layers, boundaries))
}

export function moveLayers(
  count: Count,
  boundaries: readonly number[],
  positions: readonly number[],
  origin: number,
): MoveStep {
  const start = startOf(count.layers, boundaries)
  return {
    kind: 'move',
    count: count.id,
    id: boundaries,
    before: { position: start.position, origin: start.origin },
    after: { position: positions, origin: boundaries.map(() => origin) },
  }
}

export function markLayers(
  count: Count,
  boundaries: readonly number[],
  newMarks: readonly Mark[],
  origin: number,
): MarkStep {
  const start = startOf(count.layers, boundaries)
  return {
    kind: 'mark',
    count: count.id,
    id: boundaries,
    before: { mark: start.mark, origin: start.origin },
    after: { mark: newMarks, origin: boundaries.map(() => origin) },
  }
}

/** The step that sets how far the count was checked; null when it already is. */
export function setChecked(count: Count, to: number): CheckStep | null {
  return count.checkedTo === to ? null : { kind: 'check', count: count.id, before: count.checkedTo, after: to }
}
