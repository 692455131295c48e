import type { Ladder } from '../../worker/core/ladder.ts'
import type { LayerSet } from '../document/layerSet.ts'
import { mostInformative } from './informative.ts'
import type { InformativePlace } from './informative.ts'
import type { Proposals } from './proposals.ts'

interface Reviewed {
  /** Null: there is no ladder, or it is to be out of sight. */
  ladder: Ladder | null
  layers: LayerSet
  proposals: Proposals
}

/** Going through the places where a judgement says most, one after the other. */
export class Review {
  #reviewed: () => Reviewed
  /** Sites of this ladder that were gone to already, by index. */
  #passed = $state.raw<{ ladder: Ladder | null; sites: ReadonlySet<number> }>({
    ladder: null,
    sites: new Set(),
  })
  /** After each judgement the cursor goes to the next most informative place, not to the next downcore. */
  on = $state(false)

  constructor(reviewed: () => Reviewed) {
    this.#reviewed = reviewed
  }

  /** What is left to look at, most informative first; worked out only where it is shown or gone to. */
  places: readonly InformativePlace[] = $derived.by(() => {
    const { ladder, layers, proposals } = this.#reviewed()
    if (!ladder) return []
    const passed = this.#passed.ladder === ladder ? this.#passed.sites : new Set<number>()
    return mostInformative(ladder, layers, proposals).filter(({ site }) => !passed.has(site))
  })

  /** Position of the next place, which counts as looked at from now on; null when none is left. */
  next(): number | null {
    const place = this.places.at(0)
    if (!place) return null
    this.pass(place)
    this.on = true
    return place.position
  }

  pass({ site }: InformativePlace): void {
    const { ladder } = this.#reviewed()
    const before = this.#passed.ladder === ladder ? this.#passed.sites : []
    this.#passed = { ladder, sites: new Set([...before, site]) }
  }

  /** Begins anew, for another count. */
  forget(): void {
    this.on = false
    this.#passed = { ladder: null, sites: new Set() }
  }
}
