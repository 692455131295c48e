import { Fault } from '../../worker/check.ts'
import { bringCounts } from '../commands/bringCounts.ts'
import type { Project } from '../document/project.ts'
import type { Recovered } from '../document/recover.ts'
import { newState } from '../document/state.ts'
import type { WorkbenchState } from '../document/state.ts'
import type { Autosave } from './autosave.svelte.ts'
import { countingPacket } from './countingPacket.ts'
import { JournalStore } from './journalStore.ts'
import type { ProjectEntry } from './journalStore.ts'
import type { Notices } from './notices.svelte.ts'
import { openProjectFile, saveProjectFile } from './projectFile.ts'
import type { PackedScan } from './projectFile.ts'
import type { ScanDesk } from './scanDesk.svelte.ts'
import { wordsOf } from './scanDesk.svelte.ts'
import type { Workbench } from './workbench.svelte.ts'

/** The projects kept in this browser, and which of them lies on the bench. */
export class Projects {
  #workbench: Workbench
  #autosave: Autosave
  #desk: ScanDesk
  #notices: Notices
  #store: JournalStore | null = null
  list = $state.raw<readonly ProjectEntry[]>([])

  constructor(workbench: Workbench, autosave: Autosave, desk: ScanDesk, notices: Notices) {
    this.#workbench = workbench
    this.#autosave = autosave
    this.#desk = desk
    this.#notices = notices
  }

  /** Opens the browser's storage; without it the page works, and says that nothing is kept. */
  async connect(): Promise<void> {
    try {
      this.#store = await JournalStore.open()
      await this.refresh()
    } catch (error) {
      this.#notices.trouble(
        `This browser keeps nothing: ${wordsOf(error)}. Work goes on, but save a project file before you leave (step Report).`,
      )
    }
  }

  async refresh(): Promise<void> {
    this.list = (await this.#store?.list()) ?? []
  }

  /** Lays the project last worked on onto the bench; false when the browser keeps none. */
  async resume(): Promise<boolean> {
    const last = this.list.find(({ version }) => version > 0)
    if (!last) return false
    await this.open(last.id)
    return true
  }

  /** Lays a kept project onto the bench. */
  async open(id: string): Promise<void> {
    const store = this.#store
    if (!store) return
    await this.#putAside()
    const mine = await store.claimProject(id)
    const recovered = await store.load(id)
    this.#workbench.readOnly = !mine
    this.#workbench.lay(recovered.state)
    this.#autosave.use(mine ? store : null)
    this.#tellDropped(recovered)
    if (!mine) {
      this.#notices.trouble(
        'This project is open in another tab, which does the writing. Here it can only be looked at.',
      )
    }
    await this.#recallScans()
    void store.askToPersist()
  }

  /** Lays a new or brought project onto the bench and keeps it from now on. */
  async lay(state: WorkbenchState): Promise<void> {
    await this.#putAside()
    const store = this.#store
    this.#workbench.readOnly = false
    if (store) {
      if (!(await store.claimProject(state.project.id))) {
        throw new Fault(
          'conflict',
          'project',
          state.project.id,
          'this project is open in another tab; close that tab first',
        )
      }
      await store.create(state)
    }
    this.#workbench.lay(state)
    this.#autosave.use(store)
    await this.refresh()
  }

  /** An empty project. */
  async begin(): Promise<void> {
    await this.lay(newState(crypto.randomUUID()))
  }

  /** Opens a project file in place of what lies on the bench; a file that is not sound changes nothing. */
  async openFile(file: Blob): Promise<void> {
    const opened = await openProjectFile(file)
    if (opened instanceof Fault) throw opened
    const known = this.list.find(({ id }) => id === opened.state.project.id)
    // The same project may have gone on here since the file was saved: the file then opens as a project of its own.
    const state = known
      ? { ...opened.state, project: { ...opened.state.project, id: crypto.randomUUID() } }
      : opened.state
    for (const scan of opened.scans)
      await this.#desk.bringIn(scan.file, scan.name, (words) => this.#notices.trouble(words))
    await this.lay(state)
    if (known) this.#notices.word('This project is kept here already; the file was opened as a copy beside it.')
    await this.#recallScans()
  }

  /** The project on the bench as one file, with its scans inside when asked. */
  async toFile(withScans: boolean): Promise<Blob> {
    const scans = withScans ? await this.#scansOf(this.#workbench.state.project) : []
    return saveProjectFile(this.#workbench.state, scans)
  }

  /** A transect to be counted elsewhere, as a project file without counts. */
  async toPacket(transect: string, withScan: boolean): Promise<Blob> {
    const stamp = { time: Date.now(), author: this.#workbench.author }
    const packet = countingPacket(this.#workbench.state, transect, crypto.randomUUID(), stamp)
    return saveProjectFile(packet, withScan ? await this.#scansOf(packet.project) : [])
  }

  /** Takes the counts of a file, made elsewhere, into the project on the bench; a file that does not fit changes nothing. */
  async bringHome(file: Blob): Promise<boolean> {
    const opened = await openProjectFile(file)
    if (opened instanceof Fault) throw opened
    return this.#workbench.dispatch(bringCounts(this.#workbench.state, { from: opened.state.project }))
  }

  /** Forgets a kept project for good. */
  async remove(id: string): Promise<void> {
    const store = this.#store
    if (!store || id === this.#workbench.project.id) return
    if (!(await store.claimProject(id))) {
      throw new Fault('conflict', 'project', id, 'this project is open in another tab; close that tab first')
    }
    await store.remove(id)
    store.releaseProject(id)
    await this.refresh()
  }

  /** The scans of a project, for a file that carries them; rejects with a Fault when one is not at hand. */
  async #scansOf(project: Project): Promise<PackedScan[]> {
    const scans: PackedScan[] = []
    for (const { scan } of project.sections) {
      if (scans.some(({ sha256 }) => sha256 === scan.sha256)) continue
      const kept = await this.#desk.fileOf(scan.sha256)
      if (!kept) {
        const message = `${scan.name} is not at hand; open its file first, or save without scans`
        throw new Fault('unreadable', 'scan', scan.name, message)
      }
      scans.push({ sha256: scan.sha256, name: scan.name, file: kept.file })
    }
    return scans
  }

  async #putAside(): Promise<void> {
    await this.#autosave.drained()
    this.#store?.releaseProject(this.#workbench.project.id)
  }

  async #recallScans(): Promise<void> {
    for (const { scan } of this.#workbench.project.sections) {
      try {
        await this.#desk.recall(scan.sha256)
      } catch (error) {
        this.#notices.trouble(
          `The kept copy of ${scan.name} could not be opened: ${wordsOf(error)}. Choose its file again (step Scan).`,
        )
      }
    }
  }

  #tellDropped({ dropped }: Recovered): void {
    if (dropped.length === 0) return
    const reasons = [...new Set(dropped.map(({ reason }) => reason))].join('; ')
    this.#notices.trouble(
      `${dropped.length === 1 ? 'One stored record was' : `${dropped.length} stored records were`} damaged and left out: ${reasons}. The rest of the project is whole.`,
    )
  }
}
