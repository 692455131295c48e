import { beginAgreed, settleSite } from '../commands/settleSites.ts'
import type { AgreedSite } from '../commands/settleSites.ts'
import type { Mark } from '../document/layerSet.ts'
import type { Count } from '../document/project.ts'
import type { Comparison } from './comparison.svelte.ts'
import type { Counting } from './counting.svelte.ts'
import type { Workbench } from './workbench.svelte.ts'

/** What a counter may say of a site, as the worker numbers it: absent, doubtful, certain, not looked at. */
const certain = 2
const unseen = 3

/** A cursor within this distance of a site stands on it, path pixels. */
const reach = 0.5

interface Subject {
  transect: string | null
  /** The agreed count of the transect; null: none was begun. */
  agreed: Count | null
  /** Takes a count to hand. */
  choose: (count: string) => void
}

/** Walking through the places where counts differ, and settling each into an agreed count with a reason. */
export class Settling {
  #workbench: Workbench
  #comparison: Comparison
  #counting: Counting
  #subject: () => Subject
  /** Why the difference at hand is settled as it is; kept for the next one, which often has the same reason. */
  reason = $state('')
  /** A reason was asked for: its field takes the focus. */
  asking = $state(false)

  constructor(workbench: Workbench, comparison: Comparison, counting: Counting, subject: () => Subject) {
    this.#workbench = workbench
    this.#comparison = comparison
    this.#counting = counting
    this.#subject = subject
  }

  agreed = $derived.by(() => this.#subject().agreed)
  /** Sites at which the counts differ, and where they lie, path pixels. */
  disputes = $derived.by(() => {
    const { result } = this.#comparison
    if (!result) return []
    return Array.from(result.disputed, (site) => ({ site, position: result.alignment.position[site] }))
  })
  /** For each settled site the index of the agreed count's mark that settles it: every mark stands for its nearest site. */
  settled: ReadonlyMap<number, number> = $derived.by(() => {
    const { result } = this.#comparison
    const bySite = new Map<number, number>()
    if (!result || !this.agreed || result.alignment.position.length === 0) return bySite
    const sites = result.alignment.position
    this.agreed.layers.position.forEach((position, index) => bySite.set(nearestSite(sites, position), index))
    return bySite
  })
  open = $derived(this.disputes.filter(({ site }) => !this.settled.has(site)))
  /** The difference under the cursor. */
  at = $derived.by(() => {
    const { cursor } = this.#counting
    return cursor === null ? null : (this.disputes.find(({ position }) => Math.abs(position - cursor) <= reach) ?? null)
  })

  /** To the next (+1) or previous (-1) difference, settled or not. */
  toNext(direction: 1 | -1): boolean {
    return this.#to(direction, this.disputes)
  }

  #to(direction: 1 | -1, places: readonly { position: number }[]): boolean {
    const from = this.#counting.cursor ?? (direction > 0 ? -1 : Infinity)
    const next =
      direction > 0
        ? places.find(({ position }) => position > from + reach)
        : places.findLast(({ position }) => position < from - reach)
    if (next) this.#counting.goTo(next.position)
    return next !== undefined
  }

  /** Begins the agreed count with every site that all counts which came so far hold: certain where all of them are. */
  begin(): void {
    const { result } = this.#comparison
    const { transect, choose } = this.#subject()
    if (!result || transect === null) return
    const { position, label, counters } = result.alignment
    const disputed = new Set(result.disputed)
    const sites: AgreedSite[] = []
    position.forEach((place, site) => {
      if (disputed.has(site)) return
      const labels = label.subarray(site * counters.length, (site + 1) * counters.length)
      sites.push({
        position: place,
        mark: labels.every((one) => one === certain || one === unseen) ? 'certain' : 'doubtful',
      })
    })
    if (!this.#workbench.dispatch(beginAgreed(this.#workbench.state, { transect, sites }))) return
    // At hand, so that the column of years shows what is agreed while differences are settled.
    const made = this.#workbench.project.counts.at(-1)
    if (made) choose(made.id)
    this.toNext(1)
  }

  /** Settles the difference under the cursor and goes to the next open one; without a reason the reason is asked for. */
  settle(mark: Mark): void {
    const { agreed, at } = this
    if (!agreed || !at) return
    if (this.reason.trim() === '') {
      this.asking = true
      return
    }
    const index = this.settled.get(at.site)
    const before = index === undefined ? null : agreed.layers.id[index]
    const settlement = { count: agreed.id, position: at.position, mark, reason: this.reason, before }
    if (!this.#workbench.dispatch(settleSite(this.#workbench.state, settlement))) return
    if (!this.#to(1, this.open) && this.open.length > 0) this.#counting.goTo(this.open[0].position)
  }
}

/** Index of the site nearest to a position; sites are sorted. */
function nearestSite(sites: Float64Array, position: number): number {
  let low = 0
  let high = sites.length
  while (low < high) {
    const middle = (low + high) >>> 1
    if (sites[middle] < position) low = middle + 1
    else high = middle
  }
  return low > 0 && (low === sites.length || position - sites[low - 1] <= sites[low] - position) ? low - 1 : low
}
