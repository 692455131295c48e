import type { Agreement } from '../../worker/core/counts.ts'
import type { Count } from '../document/project.ts'
import { countedBoundaries } from './chronologyDesk.svelte.ts'
import { wordsOf } from './scanDesk.svelte.ts'
import { JobCancelled } from './workerClient.ts'
import type { WorkerClient } from './workerClient.ts'

/** A count to be compared, under the name it is written by. */
export interface NamedCount {
  name: string
  count: Count
  /** The stretch that was looked at, path pixels; null: the whole transect. */
  range: { from: number; to: number } | null
}

/** The counts of the transect at hand set against one another. */
export class Comparison {
  #client: WorkerClient
  #counts: () => readonly NamedCount[]
  result = $state.raw<Agreement | null>(null)
  failure = $state('')
  /** False while the counts have changed and are being compared anew. */
  current = $state(false)

  constructor(client: WorkerClient, counts: () => readonly NamedCount[]) {
    this.#client = client
    this.#counts = counts
  }

  /** Compares the counts as they stand; called whenever they may have changed. */
  async follow(): Promise<void> {
    const counts = this.#counts().map(({ name, count, range }) => ({ name, ...countedBoundaries(count.layers), range }))
    this.failure = ''
    this.current = false
    if (counts.length < 2) {
      this.#client.cancel('agreement')
      this.result = null
      return
    }
    try {
      this.result = await this.#client.run('agreement', { counts }, { slot: 'agreement' })
      this.current = true
    } catch (error) {
      if (error instanceof JobCancelled) return
      this.result = null
      this.failure = wordsOf(error)
    }
  }
}
