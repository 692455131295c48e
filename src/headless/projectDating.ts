import { openAsBlob } from 'node:fs'
import { Fault } from '../../worker/check.ts'
import type { CountedLayers } from '../../worker/core/countedLayers.ts'
import { compareCounts } from '../../worker/core/counts.ts'
import type { CoreDate as DateOfCore } from '../../worker/core/dates.ts'
import { layersOfCount } from '../../worker/core/layersOfCount.ts'
import { finish } from '../../worker/work.ts'
import { agreedName } from '../commands/settleSites.ts'
import { countedBoundaries } from '../document/counted.ts'
import { need } from '../document/outcome.ts'
import type { Count, Project, Section } from '../document/project.ts'
import { openProjectFile } from '../session/projectFile.ts'
import { isFolder } from './files.ts'

/** What a project file holds for dating. */
export interface ProjectDating {
  layers: CountedLayers
  names: string[]
  dates: DateOfCore[]
  /** Year of the youngest counted varve; null where the top is not intact or the coring year not known. */
  topYear: number | null
  missedRate: number
}

/** Years where counts may end, path pixels, and the years all counters missed. */
interface YearSites {
  position: Float64Array
  probability: Float64Array
  missedByAll: number
}

/** With so many independent counts the counter model says how likely each site is a year. */
const countsForModel = 3

export async function readProjectDating(path: string): Promise<ProjectDating> {
  if (await isFolder(path)) throw new Fault('unreadable', 'path', path, `${path} is a folder; give a project file`)
  const file = await openAsBlob(path)
  const { project } = need(await openProjectFile(file)).state
  return projectDating(project)
}

/**
 * The layers of a project, section below section: the agreed count of each where there is one, the counter model of three or
 * more counts, or else the latest count with its doubtful layers as one half.
 */
export function projectDating(project: Project): ProjectDating {
  const sections = [...project.sections].sort((a, b) => a.depthTop - b.depthTop)
  let missed = 0
  const parts: CountedLayers[] = []
  for (const section of sections) {
    const count = countOf(project, section)
    if (!count) continue
    const sites = yearSites(project, count)
    missed += sites.missedByAll
    parts.push(layersOf(project, section, count, sites))
  }
  const layers = joined(parts)
  const names = Array.from(layers.depth, (_, i) => String(i + 1))
  const { coringYear, topIntact, topYearOpen } = project.core
  const anchored = coringYear !== null && topIntact && sections[0].depthTop === 0
  return {
    layers,
    names,
    dates: project.dates
      .filter(({ use }) => use)
      .map(({ id, label, kind, top, base, value, sigma, offset, offsetSigma }) => {
        return { id: label === '' ? id : label, kind, top, base, value, sigma, offset, offsetSigma }
      }),
    topYear: anchored ? coringYear - (topYearOpen ? 1 : 0) : null,
    missedRate: missed / layers.depth.length,
  }
}

/** The count that a section is dated by; null where it was not counted. */
function countOf(project: Project, section: Section): Count | null {
  const own = new Set(project.transects.filter((one) => one.section === section.id).map(({ id }) => id))
  const counts = project.counts.filter(({ transect, layers }) => own.has(transect) && layers.position.length > 1)
  return counts.findLast((count) => nameOf(project, count) === agreedName) ?? counts.at(-1) ?? null
}

const nameOf = (project: Project, count: Count) => project.counters.find(({ id }) => id === count.counter)?.name ?? ''

function yearSites(project: Project, count: Count): YearSites {
  const own = countedBoundaries(project, count.id)
  const single = {
    position: own.position,
    probability: Float64Array.from(own.doubtful, (doubt) => (doubt === 1 ? 0.5 : 1)),
    missedByAll: 0,
  }
  if (nameOf(project, count) === agreedName) return single
  const repeats = project.counts.filter(
    (one) => one.transect === count.transect && one.layers.position.length > 0 && nameOf(project, one) !== agreedName,
  )
  if (repeats.length < countsForModel) return single
  const { alignment, probability, latent } = finish(
    compareCounts(
      repeats.map((one) => {
        const { position, doubtful } = countedBoundaries(project, one.id)
        return { name: `${nameOf(project, one)}, pass ${one.pass}`, position, doubtful, range: null }
      }),
    ),
  )
  return { position: alignment.position, probability, missedByAll: latent?.missedByAll.mean ?? 0 }
}

function layersOf(project: Project, section: Section, count: Count, sites: YearSites): CountedLayers {
  if (!section.scale) {
    const message = `the section ${section.name} has no scale; set it before dating`
    throw new Fault('argument', 'scale', section.name, message)
  }
  const spans = project.spans.filter(({ transect }) => transect === count.transect)
  const inside = (place: number) => spans.some(({ kind, from, to }) => kind !== 'hiatus' && place > from && place < to)
  const kept = [...sites.position.keys()].filter((i) => !inside(sites.position[i]))
  return layersOfCount({
    position: Float64Array.from(kept, (i) => sites.position[i]),
    probability: Float64Array.from(kept, (i) => sites.probability[i]),
    spans: spans.map(({ from, to, kind }) => ({ from, to, kind })),
    mmPerPx: section.scale.mmPerPx,
    depthTop: section.depthTop,
  })
}

/** Sections one below the other; sections that overlap in depth are not joined by guessing. */
function joined(parts: readonly CountedLayers[]): CountedLayers {
  if (parts.length === 0) throw new Fault('argument', 'counts', 0, 'no section of the project has been counted')
  for (let k = 1; k < parts.length; k++) {
    const above = parts[k - 1].depth[parts[k - 1].depth.length - 1]
    const below = parts[k].depth[0]
    if (below < above) {
      const message = `sections overlap: one begins at ${below.toFixed(2)} mm, above the last layer of the one before at ${above.toFixed(2)} mm; set their depths so that they follow each other`
      throw new Fault('argument', 'sections', below, message)
    }
  }
  const column = (pick: (part: CountedLayers) => Float64Array) =>
    Float64Array.from(parts.flatMap((part) => [...pick(part)]))
  return {
    depth: column(({ depth }) => depth),
    thickness: column(({ thickness }) => thickness),
    probability: column(({ probability }) => probability),
    kind: Uint8Array.from(parts.flatMap(({ kind }) => [...kind])),
  }
}
