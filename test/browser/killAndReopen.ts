import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { projectToJson } from '../../src/document/parseProject.ts'
import { sameJson } from '../../src/document/sameJson.ts'
import type { WorkbenchState } from '../../src/document/state.ts'
import type { Random } from '../../worker/random.ts'
import { startedState } from '../fixtures/project.ts'
import { steadyEdit } from '../fixtures/steadyEdits.ts'
import { killChromium, launchPersistentChromium } from './chromium.ts'
import type { Report } from './savingPage.ts'
import { serveSource } from './serveSource.ts'

export interface KillFigures {
  kills: number
  /** Edits that pages reported saved. */
  saved: number
  /** What went against the promise, in words; empty: nothing was lost. */
  losses: string[]
  /** Kills after which edits were found that had not been reported yet: they were on disk, the word was still on its way. */
  ahead: number
}

/** The state of the endless series at a version, worked out here and not in the page. */
function seriesOfStates(): (version: number) => WorkbenchState {
  const states = [startedState()]
  return (version) => {
    while (states[states.length - 1].version < version) states.push(steadyEdit(states[states.length - 1]).state)
    return states[version - states[0].version]
  }
}

/** Opens the page, waits until it has read its project back, lets it edit for a while, and kills the browser. */
async function session(folder: string, url: string, lifetime: number): Promise<Report[]> {
  const context = await launchPersistentChromium(folder)
  const reports: Report[] = []
  const page = await context.newPage()
  const errors: Error[] = []
  const loaded = new Promise<void>((resolve, reject) => {
    page.on('pageerror', (error) => {
      errors.push(error)
      reject(error)
    })
    page.on('console', (message) => {
      if (!message.text().startsWith('{')) return
      reports.push(JSON.parse(message.text()) as Report)
      resolve()
    })
  })
  const gone = new Promise((resolve) => context.on('close', resolve))
  await page.goto(url)
  await loaded
  await new Promise((resolve) => setTimeout(resolve, lifetime))
  killChromium(folder)
  await gone
  // A page that gave up editing would make every later kill an idle one.
  if (errors.length > 0) throw errors[0]
  return reports
}

/** Kills a browser at random moments while its page edits without end, and compares what each next page finds. */
export async function killAndReopen(kills: number, random: Random): Promise<KillFigures> {
  const server = await serveSource()
  const url = `${server.url}test/browser/savingPage.html`
  const folder = mkdtempSync(join(tmpdir(), 'winterclay-kill-'))
  const stateAt = seriesOfStates()
  const figures: KillFigures = { kills: 0, saved: 0, losses: [], ahead: 0 }
  let promised = startedState().version
  try {
    // One more visit than kills: the last one only looks.
    for (let visit = 0; visit <= kills; visit++) {
      const reports = await session(folder, url, 20 + 500 * random.uniform())
      const [first] = reports
      if (first.said !== 'loaded') throw new Error('the page saved before it had loaded')
      const found = compare(first, promised, stateAt)
      if (found) figures.losses.push(`visit ${visit + 1}: ${found}`)
      if (first.version > promised) figures.ahead++
      const last = reports.at(-1)!
      figures.saved += last.version - first.version
      promised = last.version
      figures.kills++
    }
  } finally {
    await server.close()
    rmSync(folder, { recursive: true, force: true, maxRetries: 5, retryDelay: 200 })
  }
  // The last visit was killed as well, but no one came to look.
  figures.kills--
  return figures
}

/** What a page found against what was promised; null when the promise was kept. */
function compare(
  { version, dropped, edits, project }: Extract<Report, { said: 'loaded' }>,
  promised: number,
  stateAt: (version: number) => WorkbenchState,
): string | null {
  if (version < promised) return `edit ${promised} was reported saved, but only ${version} edits are there`
  if (dropped > 0) return `${dropped} records were damaged`
  if (edits !== version) return `the journal holds ${edits} of ${version} edits`
  return sameJson(project, projectToJson(stateAt(version).project)) ? null : `edit ${version} led to another project`
}
