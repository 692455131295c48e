/**
 * Layers that no counter marked, estimated as animals are from catch and recatch: a boundary is "caught" by a counter
 * who marks it. All assume that every mark is a real boundary and that counters miss independently of each other;
 * a layer that is faint for everyone makes them too low, a false mark makes them too high.
 */
import { checkInteger, Fault } from '../check.ts'

export interface CaptureEstimate {
  /** Lincoln-Petersen; Infinity where no boundary was matched. */
  lincolnPetersen: { years: number; sd: number }
  /** Chapman 1951, nearly unbiased. */
  chapman: { years: number; sd: number; interval95: [number, number] }
}

const normal975 = 1.959963984540054

/**
 * From n1 and n2 boundaries marked by two counters, m of them matched:
 * Lincoln-Petersen N = n1 n2 / m, Var = n1^2 n2 (n2 - m) / m^3;
 * Chapman (1951) N = (n1 + 1)(n2 + 1) / (m + 1) - 1, Var = (n1 + 1)(n2 + 1)(n1 - m)(n2 - m) / [(m + 1)^2 (m + 2)].
 */
export function captureRecapture(n1: number, n2: number, matched: number): CaptureEstimate {
  checkInteger('n1', n1, 0)
  checkInteger('n2', n2, 0)
  checkInteger('matched', matched, 0)
  if (matched > Math.min(n1, n2)) {
    throw new Fault(
      'argument',
      'matched',
      matched,
      `matched must not exceed either count; it is ${matched} of ${n1} and ${n2}`,
    )
  }
  const years = ((n1 + 1) * (n2 + 1)) / (matched + 1) - 1
  const variance = ((n1 + 1) * (n2 + 1) * (n1 - matched) * (n2 - matched)) / ((matched + 1) ** 2 * (matched + 2))
  const sd = Math.sqrt(variance)
  const plain = { years: (n1 * n2) / matched, sd: Math.sqrt((n1 * n1 * n2 * (n2 - matched)) / matched ** 3) }
  return {
    lincolnPetersen: matched > 0 ? plain : { years: Infinity, sd: Infinity },
    chapman: { years, sd, interval95: [years - normal975 * sd, years + normal975 * sd] },
  }
}

export interface ChaoEstimate {
  /** Sites marked by at least one counter. */
  seen: number
  /** Sites marked by exactly one, and exactly two counters. */
  once: number
  twice: number
  /** S + f1^2 / (2 f2); null where no site was marked exactly twice. */
  lowerBound: number | null
  /** S + f1 (f1 - 1) / (2 (f2 + 1)). */
  biasCorrected: number
}

/** Lower bound of the number of boundaries from those marked once and twice (Chao 1987, Biometrics 43, 783); allows unequal visibility. */
export function chaoLowerBound(seen: number, once: number, twice: number): ChaoEstimate {
  checkInteger('seen', seen, 0)
  checkInteger('once', once, 0)
  checkInteger('twice', twice, 0)
  if (once + twice > seen) {
    throw new Fault(
      'argument',
      'seen',
      seen,
      `seen must be at least once + twice; it is ${seen}, they are ${once} + ${twice}`,
    )
  }
  return {
    seen,
    once,
    twice,
    lowerBound: twice > 0 ? seen + (once * once) / (2 * twice) : null,
    biasCorrected: seen + (once * (once - 1)) / (2 * (twice + 1)),
  }
}
