/**
 * Why is this layer here? From a boundary's origin back through the journal: who set, moved or marked it, when, how, and
 * on what evidence.
 *
 * Exports: `LayerEvent`, `explainLayer(state, count, id)` (newest event first), `describeEvent(event)` (one sentence).
 */
import { Fault } from '../../worker/check.ts'
import { indexOfId, markAt } from './layerSet.ts'
import type { Mark } from './layerSet.ts'
import { attempt } from './outcome.ts'
import type { Outcome } from './outcome.ts'
import { needRecord } from './project.ts'
import type { WorkbenchState } from './state.ts'
import type { Step } from './steps.ts'
import type { Cause, Transaction } from './transaction.ts'

/** One thing that happened to a boundary. */
export interface LayerEvent {
  readonly seq: number
  readonly time: number
  readonly author: string
  /** How: the word for the act, for example `accept`. */
  readonly userEvent: string
  /** The computation it came from; null: a person's own judgement. */
  readonly evidence: Cause | null
  readonly act: 'placed' | 'moved' | 'marked'
  /** After the act; a position or mark that the act left alone is null. */
  readonly position: number | null
  readonly mark: Mark | null
}

export interface LayerProvenance {
  readonly position: number
  readonly mark: Mark
  /** Newest first, back to the placing of the boundary. */
  readonly events: readonly LayerEvent[]
  /** False when the journal does not reach back to the placing (older records were lost to damage). */
  readonly complete: boolean
}

export function explainLayer(state: WorkbenchState, countId: string, id: number): Outcome<LayerProvenance> {
  return attempt(() => {
    const { layers } = needRecord(state.project, 'counts', countId)
    const index = indexOfId(layers, id)
    if (index < 0) throw new Fault('conflict', 'boundary', id, `boundary ${id} is not in ${countId}`)
    const events: LayerEvent[] = []
    let origin: number | null = layers.origin[index]
    while (origin !== null) {
      const transaction = state.journal.at(origin)
      const earlier: number | null = transaction ? collectEvents(transaction, countId, id, events) : origin
      // An origin only ever points back; anything else means that the record is not held or is damaged.
      if (earlier !== null && earlier >= origin) break
      origin = earlier
    }
    return { position: layers.position[index], mark: markAt(layers, index), events, complete: origin === null }
  })
}

/**
 * Adds what a transaction did to a boundary to `events`, last act first. Returns the origin the boundary had before it;
 * null: the transaction placed it.
 */
function collectEvents(transaction: Transaction, count: string, id: number, events: LayerEvent[]): number | null {
  const { seq, time, author, userEvent } = transaction
  let origin = seq
  for (const step of transaction.steps.toReversed()) {
    const found = actOf(step, count, id, origin)
    if (!found) continue
    events.push({ seq, time, author, userEvent, evidence: transaction.cause ?? null, ...found.act })
    if (found.before === null) return null
    origin = found.before
    if (origin !== seq) return origin
  }
  return origin
}

type Act = Pick<LayerEvent, 'act' | 'position' | 'mark'>

function actOf(step: Step, count: string, id: number, origin: number): { act: Act; before: number | null } | null {
  const columns = step.kind === 'place' ? step.layers : addedLayers(step, count)
  if (columns && (step.kind !== 'place' || step.count === count)) {
    const i = columns.id.indexOf(id)
    if (i < 0 || columns.origin[i] !== origin) return null
    return { act: { act: 'placed', position: columns.position[i], mark: columns.mark[i] }, before: null }
  }
  if ((step.kind !== 'move' && step.kind !== 'mark') || step.count !== count) return null
  const i = step.id.indexOf(id)
  if (i < 0 || step.after.origin[i] !== origin) return null
  const before = step.before.origin[i]
  return step.kind === 'move'
    ? { act: { act: 'moved', position: step.after.position[i], mark: null }, before }
    : { act: { act: 'marked', position: null, mark: step.after.mark[i] }, before }
}

/** The boundaries that came in with a whole count (an import). */
function addedLayers(step: Step, count: string) {
  if (step.kind !== 'add' || step.collection !== 'counts' || step.record.id !== count) return null
  return 'layers' in step.record ? step.record.layers : null
}

/** Year-month-day hour:minute: the Swedish way of writing is that of ISO 8601. */
const minutes = new Intl.DateTimeFormat('sv-SE', { dateStyle: 'short', timeStyle: 'short', timeZone: 'UTC' })

/** One sentence for the person at the bench. */
export function describeEvent(event: LayerEvent): string {
  const what =
    event.act === 'placed'
      ? `Placed at ${(event.position ?? NaN).toFixed(1)} px as ${event.mark ?? ''}`
      : event.act === 'moved'
        ? `Moved to ${(event.position ?? NaN).toFixed(1)} px`
        : `Marked ${event.mark ?? ''}`
  const when = `${minutes.format(event.time)} UTC`
  const evidence = event.evidence
    ? `from ${event.evidence.job} (${event.evidence.method}), input ${event.evidence.inputHash.slice(0, 12)}`
    : 'by own judgement'
  return `${what} by ${event.author} on ${when}, ${evidence} (${event.userEvent}, edit ${event.seq}).`
}
