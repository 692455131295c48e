import type { DemoCount } from '../src/document/demoFacts.ts'
import { seededRandom, type Random } from '../worker/random.ts'
import type { Record } from './record.ts'
import type { Truth } from './truth.ts'

/** How careful an invented counter is. Rates are averages over the core; difficult years take most of them. */
interface Habits {
  counter: string
  /** Share of the true boundaries overlooked. */
  missed: number
  /** Marks that are no year boundaries, as a share of the true ones. */
  added: number
  /** Share of marks called doubtful. */
  doubtful: number
  /** Scatter of a mark about the boundary, px. */
  scatter: number
}

const habits: Habits[] = [
  { counter: 'A', missed: 0.011, added: 0.006, doubtful: 0.05, scatter: 0.8 },
  { counter: 'B', missed: 0.018, added: 0.011, doubtful: 0.07, scatter: 1.0 },
  { counter: 'C', missed: 0.028, added: 0.018, doubtful: 0.06, scatter: 1.4 },
]

/**
 * How hard each true boundary is to see, mean 1: weak clay, thin years and the neighbourhood of crack and beds.
 * All counters share it, so their errors are not independent, as they are not in life.
 */
function difficulties(record: Record, truth: Truth): number[] {
  const byYear = new Map(record.couplets.map((couplet) => [couplet.year, couplet]))
  const raw = truth.boundaries.map((at, i) => {
    const couplet = byYear.get(truth.years[i])!
    const pale = couplet.faint ? 14 : Math.max(0.25, 3.2 - 3 * couplet.contrast)
    const thin = Math.max(1, 16 / (couplet.thickness - (couplet.bed?.thickness ?? 0)))
    const besideCrack = Math.abs(at - truth.crack.from) < 22 ? 6 : 1
    return pale * thin * besideCrack
  })
  const mean = raw.reduce((sum, value) => sum + value, 0) / raw.length
  return raw.map((value) => value / mean)
}

interface Marked {
  at: number
  doubtful: boolean
}

/** Marks put on a second dark lamina of the same year, or on any lamina of the summer. */
function falseMarks(random: Random, truth: Truth, habit: Habits): Marked[] {
  const wanted = habit.added * truth.boundaries.length
  const marked: Marked[] = []
  const share = Math.min(0.8, (0.65 * wanted) / truth.doubledAt.length)
  for (const at of truth.doubledAt) if (random.uniform() < share) marked.push({ at, doubtful: random.uniform() < 0.45 })
  while (marked.length < wanted - 0.5) {
    const k = random.below(truth.boundaries.length - 1)
    const from = truth.boundaries[k]
    const to = truth.boundaries[k + 1]
    // Only couplets thick enough to be taken for two, and none that an event bed fills.
    if (to - from < 23 || to - from > 60) continue
    marked.push({ at: from + (to - from) * (0.45 + 0.25 * random.uniform()), doubtful: random.uniform() < 0.5 })
  }
  return marked
}

function countOf(random: Random, truth: Truth, difficulty: number[], habit: Habits): DemoCount {
  const marked = falseMarks(random, truth, habit)
  truth.boundaries.forEach((at, i) => {
    const hard = difficulty[i]
    if (random.uniform() < Math.min(0.7, habit.missed * hard)) return
    marked.push({ at, doubtful: random.uniform() < Math.min(0.8, habit.doubtful * hard) })
  })
  const placed = marked
    .map(({ at, doubtful }) => ({ at: Math.max(0.5, at + habit.scatter * random.normal()), doubtful }))
    .sort((p, q) => p.at - q.at)
  return {
    counter: habit.counter,
    position: placed.map(({ at }) => Math.round(at * 10) / 10),
    mark: placed.map(({ doubtful }) => (doubtful ? 'doubtful' : 'certain')),
  }
}

/** Three counts of the photograph by three people who have not seen each other's. */
export function drawCounts(record: Record, truth: Truth, seed: number): DemoCount[] {
  const random = seededRandom(seed)
  const difficulty = difficulties(record, truth)
  return habits.map((habit) => countOf(random, truth, difficulty, habit))
}
