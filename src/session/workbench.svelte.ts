import { Fault } from '../../worker/check.ts'
import { canRedo, canUndo, redo, undo } from '../document/history.ts'
import type { Outcome } from '../document/outcome.ts'
import type { Project } from '../document/project.ts'
import { projectAt } from '../document/projectAt.ts'
import { applyEdit, applyTransaction, newState } from '../document/state.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Edit, Stamp, Transaction } from '../document/transaction.ts'
import type { Autosave } from './autosave.svelte.ts'
import type { Notices } from './notices.svelte.ts'

/**
 * The running workbench: the current document and the only way to change it. Commands hand in edits; each becomes one
 * transaction, is shown at once and handed to the autosave. Nothing else writes to the document.
 */
export class Workbench {
  #notices: Notices
  #autosave: Autosave
  state = $state.raw<WorkbenchState>(newState('none'))
  /** The project as of an earlier edit, while that is looked at; null: the present. */
  past = $state.raw<{ project: Project; seq: number } | null>(null)
  project: Project = $derived(this.past?.project ?? this.state.project)
  canUndo = $derived(canUndo(this.state))
  canRedo = $derived(canRedo(this.state))
  /** Who is at the bench: the author of what is done next. */
  author = $state('A')
  /** True in a second tab: the document can be looked at, not changed. */
  readOnly = $state(false)

  constructor(notices: Notices, autosave: Autosave) {
    this.#notices = notices
    this.#autosave = autosave
  }

  /** Puts another document on the bench; the one there is saved already. */
  lay(state: WorkbenchState): void {
    this.state = state
    this.past = null
  }

  /** Shows the project as it was after an edit, to be looked at only; the latest edit is the present. */
  lookBack(seq: number): void {
    const project = projectAt(this.state, seq)
    if (project instanceof Fault) this.#refuse(project)
    else this.past = seq === this.state.version ? null : { project, seq }
  }

  return(): void {
    this.past = null
  }

  /**
   * Makes an edit. A Fault is told to the user and nothing changes; null (nothing to do) is passed over.
   * Returns whether the document changed.
   */
  dispatch(edit: Outcome<Edit> | null): boolean {
    if (edit === null) return false
    if (this.past) return this.#mayWrite()
    if (edit instanceof Fault) return this.#refuse(edit)
    if (edit.steps.length === 0 || !this.#mayWrite()) return false
    const outcome = applyEdit(this.state, edit, this.#stamp())
    if (outcome instanceof Fault) return this.#refuse(outcome)
    this.#accept(outcome.state, outcome.transaction)
    return true
  }

  undo(): boolean {
    return this.#revert(undo(this.state, this.#stamp()))
  }

  redo(): boolean {
    return this.#revert(redo(this.state, this.#stamp()))
  }

  #revert(transaction: Transaction | null): boolean {
    if (!transaction || !this.#mayWrite()) return false
    const outcome = applyTransaction(this.state, transaction)
    if (outcome instanceof Fault) return this.#refuse(outcome)
    this.#accept(outcome, transaction)
    return true
  }

  #accept(state: WorkbenchState, transaction: Transaction): void {
    this.state = state
    this.#autosave.append(state, transaction)
  }

  #mayWrite(): boolean {
    if (this.readOnly) {
      this.#notices.trouble(
        'This project is open in another tab, which does the writing. Close that tab, then reload this one.',
      )
    }
    if (this.past) {
      this.#notices.trouble(
        `This is the project as of edit ${this.past.seq}, to look at only. Return to the present to change it.`,
      )
    }
    return !this.readOnly && !this.past
  }

  #refuse(fault: Fault): false {
    this.#notices.trouble(sentence(fault.message))
    return false
  }

  #stamp(): Stamp {
    return { time: Date.now(), author: this.author }
  }
}

/** A Fault's words as a sentence: a capital at the start, a stop at the end. */
export function sentence(words: string): string {
  const text = words.charAt(0).toUpperCase() + words.slice(1)
  return /[.!?…]$/.test(text) ? text : `${text}.`
}
