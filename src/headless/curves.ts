import { createHash } from 'node:crypto'
import { readFile } from 'node:fs/promises'
import { basename } from 'node:path'
import { Fault } from '../../worker/check.ts'
import type { Curve, YearlyCurve } from '../../worker/core/curve.ts'
import { parseCurve } from '../../worker/core/curveFile.ts'
import { textOption } from './arguments.ts'
import { readText } from './files.ts'
import type { Options } from './verb.ts'

export const curveOptions = { curve: { type: 'string' }, 'post-bomb': { type: 'string' } } as const

export const curveOptionsHelp = `  --curve FILE       calibration curve: comma-separated rows cal BP,14C age,sigma, comments begin with #
                     (default: the built-in reduced table of IntCal20, Reimer et al. 2020, CC BY 4.0)
  --post-bomb FILE   curve of F14C after 1950, set before the other: columns year (or cal_bp),F14C,sigma by name`

/** The curves that the command line names, the main one first. */
export async function curvesOf(options: Options): Promise<Curve[]> {
  const curves: Curve[] = []
  const main = textOption(options, 'curve')
  if (main !== null) curves.push(await readCurve(main))
  const postBomb = textOption(options, 'post-bomb')
  if (postBomb !== null) {
    const curve = await readCurve(postBomb)
    if (curve.quantity !== 'f14c') {
      const message = `${postBomb} holds radiocarbon ages; --post-bomb needs a curve of F14C with named columns`
      throw new Fault('argument', '--post-bomb', postBomb, message)
    }
    curves.push(curve)
  }
  return curves
}

async function readCurve(path: string): Promise<Curve> {
  const text = await readText(path)
  const sha256 = createHash('sha256')
    .update(await readFile(path))
    .digest('hex')
  return parseCurve(text, { name: basename(path), sha256 })
}

/** A curve as results name it. */
export function curveSummary(sources: YearlyCurve['sources']) {
  return sources.map(({ name, sha256, reduced, citation }) => ({ name, sha256, reduced, citation }))
}
