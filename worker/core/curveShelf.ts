import { describe, Fault } from '../check.ts'
import { builtInCurve, joinPostBomb, yearlyCurve } from './curve.ts'
import type { Curve, YearlyCurve } from './curve.ts'

/** The name under which the built-in curve is asked for. */
export const builtInName = 'intcal20'

/**
 * The curves at hand: those given, by name, and the built-in one. The first given curve of radiocarbon ages is the one for
 * dates that name none; a given post-bomb curve (F14C) is set before whichever curve is used.
 */
export class CurveShelf {
  private readonly yearly = new Map<string, YearlyCurve>()
  private readonly curves: readonly Curve[]
  private readonly postBomb: Curve | null

  constructor(given: readonly Curve[]) {
    const bombs = given.filter(({ quantity }) => quantity === 'f14c')
    if (bombs.length > 1) {
      const names = bombs.map(({ name }) => name).join(', ')
      throw new Fault('argument', 'curves', names, `only one post-bomb curve can be used at a time; there are ${names}`)
    }
    this.postBomb = bombs.at(0) ?? null
    this.curves = given.filter(({ quantity }) => quantity === 'age')
  }

  get names(): string[] {
    return [...this.curves.map(({ name }) => name), builtInName]
  }

  /** The curve of a name, or the one for dates that name none. Throws a Fault that lists the names there are. */
  curve(name: string | undefined): YearlyCurve {
    const wanted = name ?? this.names[0]
    const known = this.yearly.get(wanted)
    if (known) return known
    const curve = wanted === builtInName ? builtInCurve() : this.curves.find((one) => one.name === wanted)
    if (!curve) {
      const message = `there is no curve ${describe(wanted)}; the curves at hand are ${this.names.join(', ')}`
      throw new Fault('argument', 'curve', wanted, message)
    }
    const years = this.postBomb ? joinPostBomb(curve, this.postBomb) : yearlyCurve(curve)
    this.yearly.set(wanted, years)
    return years
  }
}
