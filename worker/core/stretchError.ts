/** The counting error of a stretch by every convention, from the aligned sites in it. */
import { certain, doubtful, unseen, type Alignment } from './alignment.ts'
import type { CounterCells } from './counterCells.ts'
import type { CounterMarks } from './counterMarks.ts'
import type { CounterDraws } from './counterModel.ts'
import { halfLayerError, repeatCountError, type HalfLayerError, type RepeatCountError } from './countingError.ts'
import { stretchYears, type StretchYears } from './latentYears.ts'

/** One counter's marks; every mark is a year, a doubtful one half. */
export interface CounterTotal {
  name: string
  certain: number
  doubtful: number
  halfLayer: HalfLayerError
}

/** The conventions over one stretch; counters who did not look at all of it are left out. */
export interface StretchError {
  from: number
  to: number
  /** Years of each counter, NaN for those left out, [counters]. */
  years: number[]
  /** Null where no counter looked at the whole stretch. */
  repeat: RepeatCountError | null
  /** The half-layer rule for each counter, null for those left out. */
  halfLayer: (HalfLayerError | null)[]
  /** Null with a single counter. */
  latent: StretchYears | null
}

export function totalOf({ name, doubtful: inDoubt }: CounterMarks): CounterTotal {
  const doubts = inDoubt.reduce((sum, one) => sum + (one ? 1 : 0), 0)
  const sure = inDoubt.length - doubts
  return { name, certain: sure, doubtful: doubts, halfLayer: halfLayerError(sure, doubts) }
}

/**
 * Makes the function that tells the errors of the sites with from <= position < to. A site lies where its marks lie on
 * average, so that a horizon that falls between the marks of one boundary does not make the counters differ.
 */
export function stretchErrors(
  alignment: Alignment,
  model: { cells: CounterCells; draws: CounterDraws } | null,
): (from: number, to: number) => StretchError {
  const { position, label } = alignment
  const k = alignment.counters.length
  return (from, to) => {
    const first = placeOf(position, from)
    const end = placeOf(position, to)
    const halfLayer = alignment.counters.map((_, counter) => {
      let sure = 0
      let doubts = 0
      for (let s = first; s < end; s++) {
        const one = label[s * k + counter]
        if (one === unseen) return null
        if (one === certain) sure++
        if (one === doubtful) doubts++
      }
      return halfLayerError(sure, doubts)
    })
    const years = halfLayer.map((error) => error?.years ?? NaN)
    const told = years.filter((n) => !Number.isNaN(n))
    return {
      from,
      to,
      years,
      repeat: told.length > 0 ? repeatCountError(told) : null,
      halfLayer,
      latent: model ? stretchYears(model.cells, model.draws, first, end) : null,
    }
  }
}

/** First site at or below a level. */
function placeOf(position: Float64Array, level: number): number {
  const place = position.findIndex((at) => at >= level)
  return place < 0 ? position.length : place
}
