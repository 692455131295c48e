import { bedTail, tailLength } from './layerPairs.ts'
import type { YearLaw } from './layerPairs.ts'
import type { Messages, Stretch } from './semiMarkov.ts'
import { emptyStretch, recurrenceAt, survivalAt } from './thicknessLaw.ts'

/**
 * The single most probable ladder of a stretch (Viterbi 1967, for explicit durations). Indices of its sites, sorted.
 * Ties go to the ladder with the older last site, so that the result does not depend on rounding order.
 */
export function mostProbableLadder(stretch: Stretch, law: YearLaw, { pairs }: Messages): number[] {
  const { u, weight, forced, start, end } = stretch
  const n = u.length
  const best = new Float64Array(n)
  const from = new Int32Array(n).fill(-1)
  const { thickness } = law
  const length = tailLength(law)
  const logTail = Math.log(bedTail(law, 0))
  // Best site further back than the table, with the exponential tail taken out of its score.
  let oldBest = -Infinity
  let oldSite = -1
  let entered = 0
  let open = true
  for (let j = 0; j < n; j++) {
    while (entered < j && u[j] - u[entered] > thickness.longest) {
      const score = best[entered] + u[entered] / length
      if (score > oldBest) [oldBest, oldSite] = [score, entered]
      entered++
    }
    let score = open ? Math.log(recurrenceAt(thickness, u[j] - start)) : -Infinity
    let site = -1
    const old = oldBest + logTail - u[j] / length
    if (old > score) [score, site] = [old, oldSite]
    for (let i = entered; i < j; i++) {
      const one = best[i] + Math.log(pairs.weight[pairs.offset[i] + j - i - 1])
      if (one > score) [score, site] = [one, i]
    }
    best[j] = score + Math.log(weight[j])
    from[j] = site
    if (forced[j] === 1) {
      oldBest = -Infinity
      entered = j
      open = false
    }
  }
  let last = -1
  let top = open ? Math.log(emptyStretch(thickness, end - start)) : -Infinity
  for (let i = Math.max(0, forced.lastIndexOf(1)); i < n; i++) {
    const score = best[i] + Math.log(survivalAt(thickness, end - u[i]))
    if (score > top) [top, last] = [score, i]
  }
  const sites: number[] = []
  for (let i = last; i >= 0; i = from[i]) sites.push(i)
  return sites.reverse()
}
