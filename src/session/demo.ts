import { loadDemo } from '../commands/loadDemo.ts'
import { startCount } from '../commands/startCount.ts'
import type { DemoFacts } from '../document/demoFacts.ts'
import type { Session } from './session.svelte.ts'

/** The demo lies beside the page; it is invented from end to end. */
const facts = 'demo.json'

/** Opens the demo as a new project, with an empty count of the visitor's own beside those of A, B and C. */
export async function openDemo(session: Session): Promise<void> {
  const demo = (await (await fetched(facts)).json()) as DemoFacts
  const file = await (await fetched(demo.section.file)).blob()
  const scan = await session.desk.bringIn(file, demo.section.file, (words) => session.notices.word(words))
  const recipe = await session.client.run('defaultRecipe', null)
  const { workbench } = session
  await session.projects.begin()
  workbench.author = 'Winterclay'
  workbench.dispatch(loadDemo(workbench.state, { facts: demo, scan: scan.info, recipe }))
  const [transect] = workbench.project.transects
  workbench.dispatch(startCount(workbench.state, { transect: transect.id, counterName: 'You', blind: true }))
}

async function fetched(name: string): Promise<Response> {
  const response = await fetch(new URL(name, document.baseURI))
  if (!response.ok) throw new Error(`${name} was not found (${response.status})`)
  return response
}
