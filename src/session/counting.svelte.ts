import { Fault } from '../../worker/check.ts'
import { pathPixels } from '../../worker/units.ts'
import type { Span } from '../../worker/core/ladder.ts'
import { acceptCandidates } from '../commands/acceptCandidates.ts'
import { joinLayers } from '../commands/joinLayers.ts'
import { markBoundaries } from '../commands/markBoundaries.ts'
import { markSpan } from '../commands/markSpan.ts'
import { moveBoundaries } from '../commands/moveBoundaries.ts'
import { placeBoundary } from '../commands/placeBoundary.ts'
import { rejectCandidates } from '../commands/rejectCandidates.ts'
import { removeBoundaries } from '../commands/removeBoundaries.ts'
import { removeSpan } from '../commands/removeSpan.ts'
import { addNote } from '../commands/reviseNote.ts'
import { setCheckedTo } from '../commands/setCheckedTo.ts'
import { splitLayer } from '../commands/splitLayer.ts'
import { emptyLayers, marks, range } from '../document/layerSet.ts'
import type { LayerSet, Mark } from '../document/layerSet.ts'
import type { Outcome } from '../document/outcome.ts'
import type { Count, SectionSpan } from '../document/project.ts'
import type { Cause, Edit } from '../document/transaction.ts'
import type { Detection } from './detection.svelte.ts'
import { joined } from './joinedEdits.ts'
import { nextStop, noProposals, openProposals, stopAt } from './proposals.ts'
import type { Proposals, Stop } from './proposals.ts'
import { Review } from './review.svelte.ts'
import { anyStop, layerBelow, splitPlace, standsOn } from './splitPlace.ts'
import type { Workbench } from './workbench.svelte.ts'

const doubtful = marks.indexOf('doubtful')
/** A stop within this distance of the cursor is the one being judged, path pixels. */
const cursorReach = 0.5

/** What counting works on: the session says which count and which spans are at hand. */
export interface Subject {
  count: Count | null
  spans: readonly SectionSpan[]
  cause: Cause | null
}

/** The counting bench: where the cursor stands, and the verbs that judge what lies there. Positions in path pixels. */
export class Counting {
  #workbench: Workbench
  #detection: Detection
  #subject: () => Subject
  /** The cursor was moved off a proposal by hand: what is confirmed is the new place. */
  #nudged = false
  /** The last judgement, split, join or nudge, to be done again where the cursor stands then. */
  #last: (() => void) | null = null
  readonly review: Review
  cursor = $state<number | null>(null)
  /** Other end of the selected stretch; null: one place only. */
  anchor = $state<number | null>(null)
  /** First end of a span being marked. */
  pendingSpan = $state.raw<{ kind: Span['kind']; from: number } | null>(null)
  /** A note is being written at the cursor. */
  writing = $state(false)
  /** Proposals are hidden while a count is made blind of the machine too. */
  proposalsHidden = $state(false)

  constructor(workbench: Workbench, detection: Detection, subject: () => Subject) {
    this.#workbench = workbench
    this.#detection = detection
    this.#subject = subject
    this.review = new Review(() => ({
      ladder: this.proposalsHidden ? null : (this.#detection.found?.ladder ?? null),
      layers: this.layers,
      proposals: this.proposals,
    }))
  }

  count = $derived.by(() => this.#subject().count)
  layers: LayerSet = $derived(this.count?.layers ?? emptyLayers)
  proposals: Proposals = $derived.by(() => {
    const found = this.#detection.found
    return found && !this.proposalsHidden ? openProposals(found.ladder, this.layers) : noProposals
  })
  /** The boundary or proposal under the cursor. */
  stop: Stop | null = $derived(
    this.cursor === null ? null : stopAt(this.layers, this.proposals, this.cursor, cursorReach),
  )
  /** Selected stretch, younger end first; null: only the cursor. */
  selection: [number, number] | null = $derived(
    this.anchor === null || this.cursor === null || this.anchor === this.cursor
      ? null
      : [Math.min(this.anchor, this.cursor), Math.max(this.anchor, this.cursor)],
  )
  span = $derived.by(() => {
    const cursor = this.cursor
    return cursor === null
      ? null
      : (this.#subject().spans.find(({ from, to }) => cursor >= from && cursor <= to) ?? null)
  })

  goTo(position: number, extend = false): void {
    if (!extend) this.anchor = null
    else this.anchor ??= this.cursor
    this.cursor = position
    this.#nudged = false
  }

  /** To the next (+1) or previous (-1) boundary or proposal. */
  step(direction: 1 | -1, extend = false): boolean {
    this.review.on = false
    return this.#go(direction, extend, anyStop)
  }

  /** To the next open proposal; true when there was one. */
  toNextOpen(direction: 1 | -1 = 1): boolean {
    return this.#go(direction, false, { marks: () => false, proposals: true })
  }

  toNextDoubtful(direction: 1 | -1 = 1): boolean {
    return this.#go(direction, false, { marks: (mark) => mark === doubtful, proposals: false })
  }

  /** To the first boundary or proposal that was not looked at yet. */
  toNextUnchecked(): boolean {
    const from = this.count && this.count.checkedTo > 0 ? this.count.checkedTo : -1
    const stop = nextStop(this.layers, this.proposals, from, 1, anyStop)
    if (stop) this.goTo(stop.position)
    return stop !== null
  }

  /** To the place where the machine is least decided; judging there goes on to the next such place. */
  toMostInformative(): boolean {
    const place = this.review.next()
    if (place !== null) this.goTo(place)
    else this.review.on = false
    return place !== null
  }

  #go(direction: 1 | -1, extend: boolean, wanted: Parameters<typeof nextStop>[4]): boolean {
    const from = this.cursor ?? (direction > 0 ? -1 : Infinity)
    const stop = nextStop(this.layers, this.proposals, from, direction, wanted)
    if (stop) this.goTo(stop.position, extend)
    return stop !== null
  }

  /** Confirms what lies under the cursor, or everything selected, as certain boundaries, and goes on. */
  confirm(): void {
    if (this.cursor === null) this.#advance()
    else this.#judgeAndAdvance('certain')
  }

  doubt(): void {
    this.#judgeAndAdvance('doubtful')
  }

  reject(): void {
    this.#judgeAndAdvance('rejected')
  }

  #judgeAndAdvance(mark: Mark): void {
    this.#last = () => this.#judgeAndAdvance(mark)
    if (this.#judge(mark)) this.#advance()
  }

  /** Does the last judgement, split, join or nudge again, here. */
  repeat(): void {
    this.#last?.()
  }

  /** Splits the layer below the cursor: where the best candidate inside it lies, else half way. */
  split(): void {
    const count = this.count
    const layer = this.cursor === null ? null : layerBelow(this.layers, this.proposals, this.cursor, this.stop)
    this.#last = () => this.split()
    if (!count) return
    if (!layer) {
      this.#refuse('there is no layer below the cursor that could be split; go to its upper boundary first')
      return
    }
    const position = splitPlace(this.proposals, ...layer)
    const edit = splitLayer(this.#workbench.state, { count: count.id, position })
    if (this.#dispatchChecked(edit, position)) this.goTo(position)
  }

  /** Joins the layers on either side of the boundary under the cursor, or of the next one below it. */
  join(): void {
    const count = this.count
    const cursor = this.cursor
    this.#last = () => this.join()
    if (!count || cursor === null) return
    const here = this.stop
    const stop = standsOn(this.layers, here) ? here : nextStop(this.layers, this.proposals, cursor, 1, anyStop)
    if (!stop) {
      this.#refuse('there is no boundary at or below the cursor that could be taken away')
      return
    }
    const edit =
      stop.kind === 'mark'
        ? joinLayers(this.#workbench.state, { count: count.id, boundary: this.layers.id[stop.index] })
        : this.#decide([stop.position], 'rejected')
    if (this.#dispatchChecked(edit, stop.position)) this.goTo(stop.position)
  }

  #refuse(words: string): void {
    this.#workbench.dispatch(new Fault('conflict', 'cursor', this.cursor, words))
  }

  /** Writes a remark where the cursor stands. */
  note(text: string): void {
    const count = this.count
    if (!count || this.cursor === null || text.trim() === '') return
    const position = pathPixels(this.cursor)
    this.#workbench.dispatch(addNote(this.#workbench.state, { transect: count.transect, position, text: text.trim() }))
  }

  /** Confirms the open proposals from the cursor (or the first) down to a position. */
  confirmTo(position: number): void {
    const from = this.cursor ?? 0
    this.#dispatchChecked(this.#decide(this.#openBetween(Math.min(from, position), position), 'certain'), position)
    this.goTo(position)
    if (!this.toNextOpen()) this.step(-1)
  }

  /** Sets a boundary where the cursor stands; what stands there already is refused by the command. */
  placeAt(position: number, mark: Mark = 'certain'): void {
    const count = this.count
    if (!count) return
    if (this.#dispatchChecked(placeBoundary(this.#workbench.state, { count: count.id, position, mark }), position)) {
      this.goTo(position)
    }
  }

  /** Takes the boundaries at the cursor, or selected, out of the count. */
  remove(): void {
    const count = this.count
    const ids = this.#marked()
    if (!count || ids.length === 0) return
    if (this.#workbench.dispatch(removeBoundaries(this.#workbench.state, { count: count.id, ids }))) this.anchor = null
  }

  /** Moves the boundary at the cursor; an unconfirmed proposal is confirmed where it is moved to. */
  nudge(distance: number): void {
    const count = this.count
    const cursor = this.cursor
    if (!count || cursor === null) return
    this.#last = () => this.nudge(distance)
    const stop = this.stop
    const to = (stop?.position ?? cursor) + distance
    if (stop?.kind === 'mark') this.moveBoundary(this.layers.id[stop.index], to)
    else if (stop || this.#nudged) {
      this.cursor = to
      this.#nudged = true
    }
  }

  moveBoundary(id: number, to: number): void {
    const count = this.count
    if (!count) return
    const edit = moveBoundaries(this.#workbench.state, { count: count.id, ids: [id], positions: [to] })
    if (this.#workbench.dispatch(edit)) this.goTo(to)
  }

  /** Gives one boundary another mark, wherever the cursor is. */
  markAs(id: number, mark: Mark): void {
    const count = this.count
    if (count) this.#workbench.dispatch(markBoundaries(this.#workbench.state, { count: count.id, ids: [id], mark }))
  }

  /** Begins a span at the cursor, ends it at the second call; a selected stretch becomes one at once. */
  markSpan(kind: Span['kind']): void {
    const cursor = this.cursor
    const count = this.count
    if (cursor === null || !count) return
    if (this.selection) this.#addSpan(kind, ...this.selection)
    else if (kind === 'hiatus') this.#addSpan(kind, cursor, cursor)
    else if (this.pendingSpan?.kind !== kind) this.pendingSpan = { kind, from: cursor }
    else this.#addSpan(kind, Math.min(cursor, this.pendingSpan.from), Math.max(cursor, this.pendingSpan.from))
  }

  #addSpan(kind: Span['kind'], from: number, to: number): void {
    const count = this.count
    if (!count) return
    const span = { transect: count.transect, kind, from, to, count: count.id }
    if (this.#workbench.dispatch(markSpan(this.#workbench.state, span))) {
      this.pendingSpan = null
      this.anchor = null
    }
  }

  removeSpan(): void {
    if (this.span) this.#workbench.dispatch(removeSpan(this.#workbench.state, { span: this.span.id }))
  }

  /** Says that everything younger than the cursor was looked at. */
  checkToCursor(): void {
    const count = this.count
    if (!count || this.cursor === null) return
    this.#workbench.dispatch(setCheckedTo(this.#workbench.state, { count: count.id, to: this.cursor }))
  }

  escape(): void {
    this.anchor = null
    this.pendingSpan = null
    this.review.on = false
  }

  #advance(): void {
    const end = this.selection?.[1] ?? this.cursor
    this.anchor = null
    if (end !== null) this.cursor = end
    if (this.review.on && this.toMostInformative()) return
    if (!this.toNextOpen()) this.step(1)
  }

  /** Marks what is under the cursor or selected; returns whether there was anything to mark. */
  #judge(mark: Mark): boolean {
    const count = this.count
    if (!count || this.cursor === null) return false
    const end = this.selection?.[1] ?? this.cursor
    const ids = this.#marked()
    const open = this.selection ? this.#openBetween(...this.selection) : this.#proposalAtCursor(mark)
    if (ids.length === 0 && open.length === 0) return false
    const state = this.#workbench.state
    const edits = [
      ids.length > 0 ? markBoundaries(state, { count: count.id, ids, mark }) : null,
      open.length > 0 ? this.#decide(open, mark) : null,
    ]
    const edit = joined(edits)
    if (edit === null) return false
    this.#dispatchChecked(edit, end)
    // What was marked so before needs no edit; the counter has looked at it all the same and goes on.
    return !(edit instanceof Fault)
  }

  /** The proposal under the cursor, or where it was nudged to; a bare cursor stands for nothing and marks nothing. */
  #proposalAtCursor(mark: Mark): number[] {
    if (this.stop) return this.stop.kind === 'proposal' ? [this.stop.position] : []
    return this.#nudged && this.cursor !== null && mark !== 'rejected' ? [this.cursor] : []
  }

  #openBetween(from: number, to: number): number[] {
    const { position, chosen } = this.proposals
    return Array.from(position).filter(
      (place, i) => chosen[i] === 1 && place >= from - cursorReach && place <= to + cursorReach,
    )
  }

  #decide(positions: readonly number[], mark: Mark): Outcome<Edit> | null {
    const count = this.count
    if (!count || positions.length === 0) return null
    const cause = this.#subject().cause
    const choice = { count: count.id, positions, ...(cause && { cause }) }
    if (mark === 'rejected') return rejectCandidates(this.#workbench.state, choice)
    return acceptCandidates(this.#workbench.state, { ...choice, mark })
  }

  /** Ids of the boundaries under the cursor or selected. */
  #marked(): number[] {
    if (this.selection) {
      const [start, end] = range(this.layers, this.selection[0] - cursorReach, this.selection[1] + cursorReach)
      return Array.from(this.layers.id.subarray(start, end))
    }
    return this.stop?.kind === 'mark' ? [this.layers.id[this.stop.index]] : []
  }

  /** Dispatches an edit and, in the same transaction, moves "checked to here" down when the edit went further. */
  #dispatchChecked(edit: Outcome<Edit> | null, to: number): boolean {
    const count = this.count
    if (!count || edit === null) return false
    const checked = to > count.checkedTo ? setCheckedTo(this.#workbench.state, { count: count.id, to }) : null
    return this.#workbench.dispatch(joined([edit, checked]))
  }
}
