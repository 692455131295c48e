import { describe, expect, it } from 'vitest'
import { csvText, readCsv, textCell } from '../../worker/core/csv.ts'
import { seededRandom } from '../../worker/random.ts'

const letters = ['a', 'é', '7', '"', ',', '\n', ' ', '=', '-', '𝛿', "'"]

describe('a table of any texts', () => {
  it('is read back as it was written, but for the apostrophe before what a spreadsheet would run', () => {
    for (let seed = 1; seed <= 300; seed++) {
      const random = seededRandom(seed)
      const text = () => Array.from({ length: random.below(8) }, () => letters[random.below(letters.length)]).join('')
      const width = 2 + random.below(4)
      const header = Array.from({ length: width }, (_, i) => `column ${i}`)
      const rows = Array.from({ length: random.below(6) }, () => header.map(text))
      const written = csvText(
        header,
        rows.map((row) => row.map(textCell)),
      )
      const guarded = rows.map((row) => row.map((cell) => (/^\s*[=+\-@\t]/.test(cell) ? `'${cell}` : cell)))
      const read = readCsv(written, 'table')
      expect({ seed, header: read.header, rows: read.rows }).toEqual({ seed, header, rows: guarded })
    }
  })
})
