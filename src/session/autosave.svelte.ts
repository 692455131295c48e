import type { WorkbenchState } from '../document/state.ts'
import type { Transaction } from '../document/transaction.ts'
import { wordsOf } from './scanDesk.svelte.ts'

/** Transactions that go to the store together at the most. */
const mostAtOnce = 100

/** Where transactions are kept; see journalStore.ts. A promise resolves once the browser has them on disk. */
export interface TransactionKeeper {
  append(state: WorkbenchState, ...transactions: readonly Transaction[]): Promise<void>
}

/**
 * Hands every transaction to the store at once and says how far that has come. "Saved" is said only after the storage
 * transaction completed; a failure stays in sight until everything outstanding has been stored after all.
 */
export class Autosave {
  #keeper: TransactionKeeper | null = null
  #queue: { state: WorkbenchState; transaction: Transaction }[] = []
  #running = false
  #pending = $state(0)
  #failure = $state('')
  #at = $state<number | null>(null)
  /** Called once for each run of failures, with words for the user. */
  onFailure: (words: string) => void = () => undefined

  words = $derived(
    this.#failure ? 'Not saved' : this.#pending > 0 ? 'Saving …' : this.#at === null ? '' : `Saved ${clock(this.#at)}`,
  )
  settled = $derived(this.#pending === 0 && this.#failure === '')

  /** Begins to keep the transactions of another project. */
  use(keeper: TransactionKeeper | null): void {
    this.#keeper = keeper
    this.#queue = []
    this.#pending = 0
    this.#failure = ''
    this.#at = null
  }

  append(state: WorkbenchState, transaction: Transaction): void {
    this.#queue.push({ state, transaction })
    this.#pending = this.#queue.length
    if (!this.#running) void this.#work()
  }

  /** Resolves when nothing is outstanding, or when storing has failed and would only fail again. */
  async drained(): Promise<void> {
    while (this.#running && !this.#failure) await new Promise((resolve) => setTimeout(resolve, 10))
  }

  /** Tries again what could not be stored. */
  retry(): void {
    if (!this.#running && this.#queue.length > 0) void this.#work()
  }

  async #work(): Promise<void> {
    this.#running = true
    try {
      while (this.#keeper && this.#queue.length > 0) {
        const keeper = this.#keeper
        // What was done while the disk was busy goes down together, with the newest state.
        const batch = this.#queue.slice(0, mostAtOnce)
        await keeper.append(batch[batch.length - 1].state, ...batch.map(({ transaction }) => transaction))
        if (keeper !== this.#keeper) continue
        this.#queue.splice(0, batch.length)
        this.#pending = this.#queue.length
        this.#failure = ''
        this.#at = Date.now()
      }
    } catch (error) {
      const words = wordsOf(error)
      if (!this.#failure) {
        this.onFailure(
          `Your last edits are not saved: ${words}. They are kept in this tab; save a project file now (step Report), then reload.`,
        )
      }
      this.#failure = words
      // The next edit, or this timer, tries again in order: nothing is skipped.
      setTimeout(() => this.retry(), 5000)
    }
    this.#running = false
  }
}

function clock(time: number): string {
  return new Date(time).toLocaleTimeString([], { hour: '2-digit', minute: '2-digit' })
}
