import { basename } from 'node:path'
import { Fault } from '../../worker/check.ts'
import type { Candidates } from '../../worker/core/candidates.ts'
import { detrendProfile, type Detrended } from '../../worker/core/detrend.ts'
import type { Ladder } from '../../worker/core/ladder.ts'
import type { Profile } from '../../worker/core/profile.ts'
import { pathLength, type Transect } from '../../worker/core/transect.ts'
import { perform, type Circumstances } from '../../worker/dispatch.ts'
import type { ScanInfo } from '../../worker/reading/scanFile.ts'
import { finish } from '../../worker/work.ts'
import { progressLine } from './progress.ts'
import { scaleOn, transectOn, type ScanSettings, type UsedScale } from './scanSettings.ts'
import { sharpShelf } from './shelf.ts'

/** A scan and the profile read from it. */
export interface ReadScan {
  name: string
  info: ScanInfo
  transect: Transect
  scale: UsedScale
  profile: Profile
}

export interface ProfiledScan extends ReadScan {
  detrended: Detrended
}

export interface CountedScan extends ProfiledScan {
  candidates: Candidates
  ladder: Ladder
}

/** Reads the profile of a scan file by the job that the page sends to its worker, then goes on with `next`. */
async function readScan<Result>(
  path: string,
  settings: ScanSettings,
  next: (read: ReadScan, circumstances: Circumstances) => Promise<Result> | Result,
): Promise<Result> {
  const shelf = sharpShelf()
  const name = basename(path)
  const progress = progressLine(name)
  const circumstances = { shelf, onProgress: progress.show }
  try {
    const { info } = await shelf.open(path, name, progress.show, new AbortController().signal)
    try {
      const transect = transectOn(info, settings)
      const recipe = settings.recipe.profile
      const profile = await perform('profile', { scan: info.sha256, transect, recipe }, circumstances)
      if (profile.intensity.every((value) => Number.isNaN(value))) {
        throw new Fault('argument', 'path', path, `no row of the transect on ${name} is readable: move it or widen it`)
      }
      return await next({ name, info, transect, scale: scaleOn(info, settings, transect), profile }, circumstances)
    } finally {
      shelf.close(info.sha256)
    }
  } catch (error) {
    throw error instanceof Fault ? named(error, name) : error
  } finally {
    progress.clear()
  }
}

/** The same Fault, its message naming the scan: a message that knows the file's content only does not say which file. */
function named(fault: Fault, name: string): Fault {
  if (fault.message.includes(name)) return fault
  return new Fault(fault.code, fault.field, fault.value, `${name}: ${fault.message}`)
}

export function profileScan(path: string, settings: ScanSettings): Promise<ProfiledScan> {
  return readScan(path, settings, (read) => ({
    ...read,
    detrended: finish(detrendProfile(read.profile, settings.recipe.detrend)),
  }))
}

/** From a scan file to a ladder. */
export function countScan(path: string, settings: ScanSettings): Promise<CountedScan> {
  return readScan(path, settings, async (read, circumstances) => {
    const { recipe, spans } = settings
    const request = { profile: read.profile, spans, fixed: new Float64Array(), recipe }
    return { ...read, ...(await perform('ladder', request, circumstances)) }
  })
}

export const rounded = (value: number, places: number) => Number(value.toFixed(places))

/** The part of a summary that says what was read, where, and by which parameters. */
export function readingSummary({ info, transect, scale, profile }: ReadScan, settings: ScanSettings) {
  return {
    scan_sha256: info.sha256,
    scan_px: [info.width, info.height],
    mm_per_px: scale.mmPerPx === null ? null : Number(scale.mmPerPx.toPrecision(9)),
    mm_per_px_basis: scale.basis,
    mm_per_px_source: scale.source,
    path: transect.points.map(({ x, y }) => [x, y]),
    path_px: rounded(pathLength(transect.points), 2),
    band_px: transect.width,
    profile_rows: profile.intensity.length,
    profile_rows_unreadable: profile.intensity.reduce((sum, value) => sum + (Number.isNaN(value) ? 1 : 0), 0),
    recipe: settings.recipe,
    notes: info.notes,
  }
}

export function scaleInWords({ mmPerPx, source }: UsedScale): string {
  return mmPerPx === null ? `no scale: ${source}` : `${Number(mmPerPx.toPrecision(6))} mm per px (${source})`
}
