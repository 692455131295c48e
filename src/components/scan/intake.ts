import { addSection } from '../../commands/addSection.ts'
import type { Session } from '../../session/session.svelte.ts'
import { wordsOf } from '../../session/scanDesk.svelte.ts'
import { JobCancelled } from '../../session/workerClient.ts'

/** Takes files that were dropped or picked: each scan becomes a section; one that cannot be read is told and changes nothing. */
export async function intake(session: Session, files: readonly File[]): Promise<void> {
  for (const file of files) {
    try {
      await takeScan(session, file)
    } catch (error) {
      if (error instanceof JobCancelled) continue
      session.notices.trouble(`${file.name} was not taken in: ${wordsOf(error)}`)
    }
  }
}

async function takeScan(session: Session, file: File): Promise<void> {
  const { workbench, desk } = session
  const wanted = session.section && !session.scan ? session.section.scan : null
  const scan = await desk.bringIn(file, file.name, (words) => session.notices.trouble(words))
  if (workbench.project.sections.some((section) => section.scan.sha256 === scan.info.sha256)) {
    session.notices.word(`${file.name} is in this project already; it is open now.`)
    return
  }
  if (wanted) {
    session.notices.word(
      `${file.name} is another scan than ${wanted.name} (its content differs), so it was added as a new section.`,
    )
  }
  const recipe = await session.client.run('defaultRecipe', null)
  if (workbench.dispatch(addSection(workbench.state, { scan: scan.info, recipe }))) {
    const added = workbench.project.sections.at(-1)
    if (added) session.choose(added.id)
    session.step = 'scan'
    for (const note of scan.info.notes) session.notices.word(note)
  }
}
