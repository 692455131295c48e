import type { Profile } from '../../worker/core/profile.ts'
import type { Span } from '../../worker/core/ladder.ts'
import type { Recipe } from '../../worker/core/recipe.ts'
import type { Transect } from '../../worker/core/transect.ts'
import type { Reply } from '../../worker/protocol.ts'
import type { Progress } from '../../worker/work.ts'
import { wordsOf } from './scanDesk.svelte.ts'
import { JobCancelled } from './workerClient.ts'
import type { WorkerClient } from './workerClient.ts'

/** What the candidates are found in, and how. */
export interface Subject {
  scan: string
  transect: Transect
  spans: readonly Span[]
  recipe: Recipe
}

/**
 * Profile, candidates and ladder of the transect at hand. Follows every change of transect, spans and recipe; the newer
 * job overtakes the older, and what is shown is `current` only when it was computed from the subject as it stands.
 */
export class Detection {
  #client: WorkerClient
  #wanted = ''
  #profileKey = ''
  profile = $state.raw<Profile | null>(null)
  found = $state.raw<Reply<'ladder'> | null>(null)
  /** False while a newer computation runs: what is shown belongs to an earlier subject. */
  current = $state(false)
  progress = $state.raw<Progress | null>(null)
  failure = $state('')

  constructor(client: WorkerClient) {
    this.#client = client
  }

  /** Computes what is missing for this subject; resolves when it is shown or overtaken. */
  async follow(subject: Subject | null): Promise<void> {
    const key = subject ? JSON.stringify(subject) : ''
    if (key === this.#wanted) return
    this.#wanted = key
    this.failure = ''
    this.current = false
    if (!subject) {
      this.#forget()
      return
    }
    try {
      const profile = await this.#profileOf(subject)
      const found = await this.#client.run(
        'ladder',
        { profile, spans: [...subject.spans], fixed: new Float64Array(0), recipe: subject.recipe },
        { slot: 'ladder', onProgress: (progress) => (this.progress = progress) },
      )
      if (this.#wanted !== key) return
      this.found = found
      this.current = true
    } catch (error) {
      if (error instanceof JobCancelled || this.#wanted !== key) return
      this.failure = wordsOf(error)
      this.found = null
    }
    this.progress = null
  }

  /** Stops what runs; what was shown before stays, marked as not current. */
  cancel(): void {
    this.#wanted = 'cancelled'
    this.#client.cancel('profile')
    this.#client.cancel('ladder')
    this.progress = null
  }

  async #profileOf({ scan, transect, recipe }: Subject): Promise<Profile> {
    const plain: Transect = {
      points: transect.points,
      width: transect.width,
      tilt: transect.tilt,
      masks: transect.masks,
    }
    const key = JSON.stringify([scan, plain, recipe.profile])
    if (this.profile && key === this.#profileKey) return this.profile
    this.#client.cancel('ladder')
    const profile = await this.#client.run(
      'profile',
      { scan, transect: plain, recipe: recipe.profile },
      { slot: 'profile', onProgress: (progress) => (this.progress = progress) },
    )
    this.profile = profile
    this.#profileKey = key
    return profile
  }

  #forget(): void {
    this.#client.cancel('profile')
    this.#client.cancel('ladder')
    this.profile = null
    this.#profileKey = ''
    this.found = null
    this.progress = null
  }
}
