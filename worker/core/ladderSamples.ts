import type { Random } from '../random.ts'
import { bedTail } from './layerPairs.ts'
import type { YearLaw } from './layerPairs.ts'
import type { Messages, Stretch } from './semiMarkov.ts'
import { recurrenceAt } from './thicknessLaw.ts'

/**
 * One ladder of a stretch drawn from the posterior: from the young end down, each next boundary from
 * p(j | i) = g(i, j) up_j / (up_i / w_i). Indices of its sites, sorted.
 */
export function sampleStretch(stretch: Stretch, law: YearLaw, messages: Messages, random: Random): number[] {
  const sites: number[] = []
  for (let at = nextSite(stretch, law, messages, -1, random); at >= 0;) {
    sites.push(at)
    at = nextSite(stretch, law, messages, at, random)
  }
  return sites
}

/** The site drawn to follow site `at` (-1: the young end of the stretch); -1 when none follows. */
function nextSite(
  { u, weight, forced, start }: Stretch,
  law: YearLaw,
  { pairs, up, logTotal }: Messages,
  at: number,
  random: Random,
): number {
  const logWhole = at < 0 ? logTotal : Math.log(up.value[at] / weight[at]) + up.scale[at]
  let left = random.uniform()
  for (let j = at + 1; j < u.length; j++) {
    const g = at < 0 ? recurrenceAt(law.thickness, u[j] - start) : pairWeight(at, j)
    left -= g * up.value[j] * Math.exp(up.scale[j] - logWhole)
    // No ladder passes a forced site, whatever rounding has left over.
    if (left < 0 || forced[j] === 1) return j
  }
  return -1

  function pairWeight(i: number, j: number): number {
    const k = pairs.offset[i] + j - i - 1
    return k < pairs.offset[i + 1] ? pairs.weight[k] : bedTail(law, u[j] - u[i])
  }
}
