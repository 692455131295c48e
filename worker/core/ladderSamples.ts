import type { Random } from '../random.ts'
import type { Messages, Stretch } from './semiMarkov.ts'
import { densityAt, recurrenceAt } from './thicknessLaw.ts'
import type { ThicknessLaw } from './thicknessLaw.ts'

/**
 * One ladder of a stretch drawn from the posterior: from the young end down, each next boundary from
 * p(j | i) = f(u_j - u_i) up_j / (up_i / w_i). Indices of its sites, sorted.
 */
export function sampleStretch(stretch: Stretch, law: ThicknessLaw, messages: Messages, random: Random): number[] {
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
  law: ThicknessLaw,
  { up, logTotal }: Messages,
  at: number,
  random: Random,
): number {
  const logWhole = at < 0 ? logTotal : Math.log(up.value[at] / weight[at]) + up.scale[at]
  let left = random.uniform()
  for (let j = at + 1; j < u.length; j++) {
    const f = at < 0 ? recurrenceAt(law, u[j] - start) : densityAt(law, u[j] - u[at])
    left -= f * up.value[j] * Math.exp(up.scale[j] - logWhole)
    // No ladder passes a forced site, whatever rounding has left over.
    if (left < 0 || forced[j] === 1) return j
  }
  return -1
}
