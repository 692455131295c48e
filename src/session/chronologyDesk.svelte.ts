import type { Chronology, ChronologyRequest, CountedBoundaries, ErrorConvention } from '../../worker/core/chronology.ts'
import { marks } from '../document/layerSet.ts'
import type { LayerSet } from '../document/layerSet.ts'
import { wordsOf } from './scanDesk.svelte.ts'
import { JobCancelled } from './workerClient.ts'
import type { WorkerClient } from './workerClient.ts'

const rejected = marks.indexOf('rejected')
const doubtful = marks.indexOf('doubtful')

/** The boundaries of a count that count, as the worker takes them. */
export function countedBoundaries(layers: LayerSet): CountedBoundaries {
  const counted = [...layers.mark.keys()].filter((index) => layers.mark[index] !== rejected)
  return {
    position: Float64Array.from(counted, (index) => layers.position[index]),
    doubtful: Uint8Array.from(counted, (index) => (layers.mark[index] === doubtful ? 1 : 0)),
  }
}

/** The chronology of the count at hand, worked out again after every edit; the old one stays, marked old, until then. */
export class ChronologyDesk {
  #client: WorkerClient
  #request: () => ChronologyRequest | null
  /** How the error is reckoned; null: from repeat counts where there are any, else from the doubtful layers. */
  chosen = $state<ErrorConvention | null>(null)
  result = $state.raw<Chronology | null>(null)
  current = $state(false)
  failure = $state('')

  constructor(client: WorkerClient, request: () => ChronologyRequest | null) {
    this.#client = client
    this.#request = request
  }

  /** Works out what the request asks; called whenever it may have changed. */
  async follow(): Promise<void> {
    const request = this.#request()
    this.current = false
    if (!request) {
      this.#client.cancel('chronology')
      this.result = null
      this.failure = ''
      return
    }
    try {
      this.result = await this.#client.run('chronology', request, { slot: 'chronology' })
      this.current = true
      this.failure = ''
    } catch (error) {
      if (error instanceof JobCancelled) return
      this.result = null
      this.failure = wordsOf(error)
    }
  }

  /** The chronology as it stands now, for a table. */
  async now(): Promise<Chronology> {
    const request = this.#request()
    if (!request) throw new Error('there is no count yet')
    return this.#client.run('chronology', request)
  }
}
