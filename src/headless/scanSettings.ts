import { checkPositive, checkWithin, describe, Fault } from '../../worker/check.ts'
import { spanKinds, type Span } from '../../worker/core/ladder.ts'
import { defaultRecipe, type Recipe } from '../../worker/core/recipe.ts'
import type { Orientation } from '../../worker/core/scan.ts'
import { defaultTransect, type Transect } from '../../worker/core/transect.ts'
import type { ScanInfo } from '../../worker/reading/scanFile.ts'
import { scanPixels, type Point } from '../../worker/units.ts'
import { readRecipe } from '../document/recipeForm.ts'
import { argumentFault, numberFrom, numberOption, orientationOption, pathOption, textOption } from './arguments.ts'
import { readJson, readTable } from './files.ts'
import type { Options } from './verb.ts'

/** Options of the verbs that read a scan. */
export const scanOptions = {
  'mm-per-px': { type: 'string' },
  path: { type: 'string' },
  band: { type: 'string' },
  orientation: { type: 'string' },
  recipe: { type: 'string' },
} as const

/** What counting takes besides. */
export const spansOption = { spans: { type: 'string' } } as const

export const scanOptionsHelp = `  --mm-per-px F      length of a pixel in mm; without it the resolution stated in the file is used
                     and named in the summary, and with none the depth columns stay empty
  --path "x0,y0 …"   transect in scan pixels, young end first (default: down the middle of the longer
                     axis, young end left or up)
  --orientation O    where the young end lies, for the default transect: young-left, young-right,
                     young-up or young-down
  --band PX          width over which the profile is taken (default: two thirds of the breadth of
                     the scan, at most 200)
  --recipe FILE      detection parameters as JSON; what it leaves out keeps its default`

export const spansHelp = `  --spans FILE       CSV from_px,to_px,kind with kind event, unreadable or hiatus: stretches of the
                     path that hold no years to be counted`

/** What the user asked for, before the scan is known. */
export interface ScanSettings {
  mmPerPx: number | null
  path: Point[] | null
  band: number | null
  orientation: Orientation | null
  recipe: Recipe
  spans: Span[]
}

export async function scanSettings(options: Options): Promise<ScanSettings> {
  const mmPerPx = numberOption(options, 'mm-per-px')
  if (mmPerPx !== null) checkPositive('--mm-per-px', mmPerPx)
  const band = numberOption(options, 'band')
  if (band !== null) checkWithin('--band', band, 1, 1e6)
  const path = pathOption(options, 'path')
  const orientation = orientationOption(options, 'orientation')
  if (path && orientation) {
    argumentFault(
      '--orientation',
      options.orientation,
      '--path already says where the young end lies: leave --orientation out',
    )
  }
  const recipe = await recipeFrom(textOption(options, 'recipe'))
  const spans = await spansFrom(textOption(options, 'spans'))
  return { mmPerPx, path, band, orientation, recipe, spans }
}

/** The default recipe with what the file says put over it, group by group. */
async function recipeFrom(file: string | null): Promise<Recipe> {
  if (file === null) return defaultRecipe
  const given = await readJson(file)
  if (typeof given !== 'object' || given === null || Array.isArray(given)) {
    throw new Fault(
      'format',
      'recipe',
      given,
      `${file} must hold an object with the groups ${Object.keys(defaultRecipe).join(', ')}`,
    )
  }
  const merged: [string, unknown][] = Object.entries(defaultRecipe)
  for (const [group, values] of Object.entries(given as Record<string, unknown>)) {
    const known = merged.find(([name]) => name === group)
    if (known && typeof values === 'object' && values !== null && !Array.isArray(values)) {
      known[1] = { ...(known[1] as object), ...values }
    } else merged.push([group, values])
  }
  try {
    return readRecipe(Object.fromEntries(merged), 'recipe')
  } catch (error) {
    if (error instanceof Fault) throw new Fault(error.code, error.field, given, `${file}: ${error.message}`)
    throw error
  }
}

async function spansFrom(file: string | null): Promise<Span[]> {
  if (file === null) return []
  const { rows, lines } = await readTable(file, ['from_px', 'to_px', 'kind'])
  return rows.map(({ from_px, to_px, kind }, i) => {
    const place = `${file}, line ${lines[i]}`
    const found = spanKinds.find((one) => one === kind)
    if (!found) {
      throw new Fault(
        'format',
        'kind',
        kind,
        `${place}: kind must be one of ${spanKinds.join(', ')}; it is ${describe(kind)}`,
      )
    }
    return { from: numberFrom(`${place}: from_px`, from_px), to: numberFrom(`${place}: to_px`, to_px), kind: found }
  })
}

/** The longer axis, young end left or up. */
function defaultOrientation(info: ScanInfo): Orientation {
  return { axis: info.width >= info.height ? 'x' : 'y', young: 'low' }
}

/** The transect the settings mean on this scan. */
export function transectOn(info: ScanInfo, { path, band, orientation }: ScanSettings): Transect {
  const byDefault = defaultTransect(info, orientation ?? (path ? alongPath(path) : defaultOrientation(info)))
  return { ...byDefault, points: path ?? byDefault.points, width: band === null ? byDefault.width : scanPixels(band) }
}

/** The axis of the scan that a path follows. */
function alongPath(path: Point[]): Orientation {
  const dx = path[path.length - 1].x - path[0].x
  const dy = path[path.length - 1].y - path[0].y
  return { axis: Math.abs(dx) >= Math.abs(dy) ? 'x' : 'y', young: 'low' }
}

/** The scale along the transect and what it rests on. */
export interface UsedScale {
  mmPerPx: number | null
  basis: 'given' | 'file' | 'none'
  /** For people: where it comes from. */
  source: string
}

export function scaleOn(info: ScanInfo, { mmPerPx }: ScanSettings, transect: Transect): UsedScale {
  if (mmPerPx !== null) return { mmPerPx, basis: 'given', source: '--mm-per-px' }
  if (!info.resolution) return { mmPerPx: null, basis: 'none', source: 'the file states no resolution' }
  const { xPerMm, yPerMm, source } = info.resolution
  const perMm = alongPath(transect.points).axis === 'x' ? xPerMm : yPerMm
  return { mmPerPx: 1 / perMm, basis: 'file', source: `${source}; not checked against a ruler` }
}
