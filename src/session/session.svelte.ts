import { untrack } from 'svelte'
import type { ChronologyRequest } from '../../worker/core/chronology.ts'
import { pathLength } from '../../worker/core/transect.ts'
import { agreedName } from '../commands/settleSites.ts'
import type { Count, Note, Section, SectionSpan, SectionTransect } from '../document/project.ts'
import type { Cause } from '../document/transaction.ts'
import { Autosave } from './autosave.svelte.ts'
import { ChronologyDesk, countedBoundaries } from './chronologyDesk.svelte.ts'
import { Comparison } from './comparison.svelte.ts'
import { Counting } from './counting.svelte.ts'
import { Dating } from './dating.svelte.ts'
import type { DatingSubject } from './dating.svelte.ts'
import { Detection } from './detection.svelte.ts'
import { notesInSight } from './notesInSight.ts'
import { Notices } from './notices.svelte.ts'
import { openDemo } from './demo.ts'
import { Projects } from './projects.svelte.ts'
import { ScanDesk, wordsOf } from './scanDesk.svelte.ts'
import type { ScanKeeper } from './scanDesk.svelte.ts'
import { Settling } from './settling.svelte.ts'
import { Workbench } from './workbench.svelte.ts'
import type { WorkerClient } from './workerClient.ts'

/** The steps of the job, in its own order. */
export const steps = [
  { id: 'scan', name: 'Scan', purpose: 'Bring in scans, set scale, depth and transect' },
  { id: 'count', name: 'Count', purpose: 'Confirm or edit the layers, year by year' },
  { id: 'compare', name: 'Compare', purpose: 'What repeat counts say of the counting error' },
  { id: 'date', name: 'Date', purpose: 'Tie the count to calendar years' },
  { id: 'rates', name: 'Rates', purpose: 'Thickness and sedimentation per year' },
  { id: 'report', name: 'Report', purpose: 'Save the project, figures and tables' },
] as const
export type StepId = (typeof steps)[number]['id']

/** A count checked to this share of its transect is as good as done. */
const finishedShare = 0.95

/** Everything that runs while the page is open, and which section, transect and count are at hand. */
export class Session {
  readonly notices = new Notices()
  readonly autosave = new Autosave()
  readonly client: WorkerClient
  readonly workbench: Workbench
  readonly projects: Projects
  readonly desk: ScanDesk
  readonly detection: Detection
  readonly counting: Counting
  readonly chronology: ChronologyDesk
  readonly comparison: Comparison
  readonly dating: Dating
  readonly settling: Settling
  step = $state<StepId>('scan')
  #sectionId = $state('')
  #countId = $state('')
  /** Blind counts under way whose counter asked to see the others. */
  #opened = $state.raw<ReadonlySet<string>>(new Set())

  constructor(client: WorkerClient, keeper: ScanKeeper) {
    this.client = client
    this.workbench = new Workbench(this.notices, this.autosave)
    this.desk = new ScanDesk(client, keeper)
    this.projects = new Projects(this.workbench, this.autosave, this.desk, this.notices)
    this.detection = new Detection(client)
    this.counting = new Counting(this.workbench, this.detection, () => ({
      count: this.count,
      spans: this.spans,
      cause: this.cause,
    }))
    this.chronology = new ChronologyDesk(client, () => this.chronologyRequest)
    this.comparison = new Comparison(client, () => this.compared)
    this.settling = new Settling(this.workbench, this.comparison, this.counting, () => ({
      transect: this.transect?.id ?? null,
      agreed: this.agreed,
      choose: (count) => this.chooseCount(count),
    }))
    this.dating = new Dating(client, () => this.datingSubject)
    this.autosave.onFailure = (words) => this.notices.trouble(words)
  }

  section: Section | null = $derived.by(() => {
    const { sections } = this.workbench.project
    return sections.find(({ id }) => id === this.#sectionId) ?? sections.at(0) ?? null
  })
  scan = $derived.by(() => this.desk.get(this.section?.scan.sha256))
  /** Ids of the transects of the section at hand. */
  #own = $derived.by(() => {
    const { transects } = this.workbench.project
    return new Set(transects.filter(({ section }) => section === this.section?.id).map(({ id }) => id))
  })
  /** Counts of the section at hand, oldest first. */
  counts: readonly Count[] = $derived.by(() =>
    this.workbench.project.counts.filter(({ transect }) => this.#own.has(transect)),
  )
  count: Count | null = $derived.by(() => {
    if (!this.workbench.past) return this.#chosenOf(this.counts)
    // Looking back shows the same count as it was, never another in its stead: it might be one not to be seen.
    const now = this.#chosenOf(this.workbench.state.project.counts.filter(({ transect }) => this.#own.has(transect)))
    return this.counts.find(({ id }) => id === now?.id) ?? null
  })
  transect: SectionTransect | null = $derived.by(() => {
    const { transects } = this.workbench.project
    const own = transects.filter(({ section }) => section === this.section?.id)
    return own.find(({ id }) => id === this.count?.transect) ?? own.at(0) ?? null
  })
  spans: readonly SectionSpan[] = $derived.by(() =>
    this.workbench.project.spans.filter(({ transect }) => transect === this.transect?.id),
  )
  /** What the candidates are found in; null while the scan is not open. */
  subject = $derived.by(() => {
    if (!this.section || !this.transect || !this.scan) return null
    const { points, width, tilt, masks } = this.transect
    const spans = this.spans.map(({ from, to, kind }) => ({ from, to, kind }))
    return { scan: this.scan.info.sha256, transect: { points, width, tilt, masks }, spans, recipe: this.section.recipe }
  })
  /** The latest agreed count of the transect at hand; null: none was begun. */
  agreed: Count | null = $derived.by(
    () => this.counts.findLast((count) => count.transect === this.transect?.id && this.#isAgreed(count)) ?? null,
  )
  /** Independent counts with at least one boundary: a count just begun says nothing of the error yet. */
  counted: readonly Count[] = $derived(
    this.counts.filter((count) => count.layers.position.length > 0 && !this.#isAgreed(count)),
  )
  /** The count at hand is blind and its counter not yet at the end: no other is shown, in any step. */
  sealed: boolean = $derived.by(() => {
    const { count, transect } = this
    if (!count?.blind || !transect || this.#opened.has(count.id)) return false
    return this.#rangeOf(count) !== null
  })
  /** Notes that may be seen beside the count at hand. */
  notes: readonly Note[] = $derived.by(() => {
    const { count, transect } = this
    if (!transect || this.workbench.project.notes.length === 0) return []
    // The journal only says which notes are older than the count; it changes with every key and need not be followed.
    const { journal } = untrack(() => this.workbench.state)
    return notesInSight(this.workbench.project.notes, journal, transect.id, this.sealed ? count : null)
  })
  /** The counts of the transect at hand, by name, that can be set against one another. */
  compared = $derived.by(() => {
    if (this.sealed) return []
    return this.counted
      .filter(({ transect }) => transect === this.transect?.id)
      .map((count) => ({ name: this.countName(count), count, range: this.#rangeOf(count) }))
  })
  /** Calendar year of the youngest counted varve; null where the count floats. */
  anchorYear: number | null = $derived.by(() => {
    const { coringYear, topIntact, topYearOpen } = this.workbench.project.core
    if (coringYear === null || !topIntact || (this.section?.depthTop ?? 0) > 0) return null
    return coringYear - (topYearOpen ? 1 : 0)
  })
  /** What three or more counts together say of every site: the counter model's years, which ages rest on by default. */
  counterModel = $derived.by(() => {
    const { result, current } = this.comparison
    return current && result?.latent && result.totals.length >= 3
      ? { sites: result.alignment.position, ...result.latent }
      : null
  })
  chronologyRequest: ChronologyRequest | null = $derived.by(() => {
    const { count, section } = this
    if (!count || !section || count.layers.position.length === 0) return null
    const repeats = this.counted.filter(({ transect }) => transect === count.transect)
    const model = this.counterModel
    const sites = model && { position: model.sites, yearsTo: model.yearsTo, sdTo: model.sdTo }
    const usual = sites ? 'sites' : repeats.length > 1 ? 'repeat-counts' : 'half-layer'
    const chosen = this.chronology.chosen ?? usual
    const possible = chosen === 'sites' ? sites !== null : chosen !== 'repeat-counts' || repeats.length > 1
    return {
      count: countedBoundaries(count.layers),
      repeats: repeats.map(({ layers }) => countedBoundaries(layers)),
      spans: this.spans.map(({ from, to, kind }) => ({ from, to, kind })),
      mmPerPx: section.scale?.mmPerPx ?? null,
      depthTop: section.depthTop,
      sites,
      systematicSd: this.dating.biasSd,
      convention: possible ? chosen : usual,
      anchorYear: this.anchorYear,
    }
  })
  /** What the calendar ages are worked out from: the count at hand with its doubts, the dates, the anchor. */
  datingSubject: DatingSubject | null = $derived.by(() => {
    const { count, section } = this
    if (!count || !section?.scale) return null
    return {
      count: {
        ...this.#yearSites(count),
        spans: this.spans.map(({ from, to, kind }) => ({ from, to, kind })),
        mmPerPx: section.scale.mmPerPx,
        depthTop: section.depthTop,
      },
      dates: this.workbench.project.dates,
      topYear: this.anchorYear,
    }
  })
  /** Other counts are out of sight while this one is made blind. */
  blind = $derived(this.step === 'count' && (this.count?.blind ?? false))

  /** What an accepted proposal came from: kept with it in the journal. */
  cause: Cause | null = $derived.by(() => {
    if (!this.section) return null
    return {
      job: 'ladder',
      method: 'semi-Markov ladder 1',
      recipe: JSON.parse(JSON.stringify(this.section.recipe)) as Cause['recipe'],
      seed: null,
      inputHash: this.section.scan.sha256,
    }
  })

  /** Lays the first project on the bench: the last one worked on, or the demo. */
  async start(): Promise<void> {
    await this.projects.connect()
    try {
      if (!(await this.projects.resume())) await openDemo(this)
      this.arrive()
    } catch (error) {
      this.notices.trouble(`Nothing could be laid on the bench: ${wordsOf(error)}. You can still open your own scans.`)
    }
  }

  /** Where years may end and how likely each is: by the counter model where there are counts enough, else (and in an agreed count) by the count's own doubts. */
  #yearSites(count: Count): { position: Float64Array; probability: Float64Array } {
    const model = this.counterModel
    if (model && count.id !== this.agreed?.id) {
      const outside = (place: number) =>
        !this.spans.some(({ kind, from, to }) => kind !== 'hiatus' && place > from && place < to)
      const kept = [...model.sites.keys()].filter((site) => outside(model.sites[site]))
      return {
        position: Float64Array.from(kept, (site) => model.sites[site]),
        probability: Float64Array.from(kept, (site) => model.probability[site]),
      }
    }
    const { position, doubtful } = countedBoundaries(count.layers)
    return { position, probability: Float64Array.from(doubtful, (inDoubt) => (inDoubt ? 0.5 : 1)) }
  }

  choose(section: string): void {
    this.#sectionId = section
    this.#countId = ''
    this.counting.escape()
    this.counting.review.forget()
    this.counting.cursor = null
  }

  chooseCount(count: string): void {
    this.#countId = count
    this.counting.escape()
    this.counting.review.forget()
    this.counting.cursor = null
    this.#takeAuthor()
  }

  /** Begins anew on whatever was laid on the bench: its first section, its last count. */
  arrive(): void {
    this.choose(this.workbench.project.sections.at(0)?.id ?? '')
    this.#takeAuthor()
    this.step = this.count ? 'count' : 'scan'
  }

  /** Whoever's count is at hand is at the bench. */
  #takeAuthor(): void {
    const counter = this.workbench.project.counters.find(({ id }) => id === this.count?.counter)
    // Nobody is called Agreed: who settles differences stays the author.
    if (counter && counter.name !== agreedName) this.workbench.author = counter.name
  }

  /** Ends the blindness of the count at hand: its counter wants to see the others. */
  unseal(): void {
    if (this.count) this.#opened = new Set([...this.#opened, this.count.id])
  }

  #chosenOf(counts: readonly Count[]): Count | null {
    return counts.find(({ id }) => id === this.#countId) ?? counts.at(-1) ?? null
  }

  /** How far a count has come, path pixels; null once it has come to the end of its transect. */
  #rangeOf(count: Count): { from: number; to: number } | null {
    const transect = this.workbench.project.transects.find(({ id }) => id === count.transect)
    if (!transect || count.checkedTo >= finishedShare * pathLength(transect.points)) return null
    return { from: 0, to: Math.max(count.checkedTo, count.layers.position.at(-1) ?? 0) }
  }

  #isAgreed(count: Count): boolean {
    return this.counterName(count) === agreedName
  }

  counterName(count: Count): string {
    return this.workbench.project.counters.find(({ id }) => id === count.counter)?.name ?? count.counter
  }

  /** Name of a count as it is written everywhere: the counter, and the pass where there is more than one. */
  countName(count: Count): string {
    const name = this.counterName(count)
    const passes = this.counts.filter(({ counter }) => counter === count.counter).length
    return passes > 1 || count.pass > 1 ? `${name} ${count.pass}` : name
  }
}
