import { damaged } from './tiffDirectory.ts'

/**
 * Undoes the filter of one PNG row in place (PNG specification, section 9). `row` and `above` start with the filter byte;
 * `pixelBytes` is the distance to the byte on the left. A separate loop for each filter, because every byte passes here.
 */
export function unfilter(row: Uint8Array, above: Uint8Array, pixelBytes: number): void {
  switch (row[0]) {
    case 0:
      return
    case 1:
      for (let i = pixelBytes + 1; i < row.length; i++) row[i] += row[i - pixelBytes]
      return
    case 2:
      for (let i = 1; i < row.length; i++) row[i] += above[i]
      return
    case 3:
      for (let i = 1; i <= pixelBytes && i < row.length; i++) row[i] += above[i] >> 1
      for (let i = pixelBytes + 1; i < row.length; i++) row[i] += (row[i - pixelBytes] + above[i]) >> 1
      return
    case 4:
      unfilterPaeth(row, above, pixelBytes)
      return
    default:
      throw damaged('PNG image data', row[0], `uses filter ${row[0]}, which PNG does not have`)
  }
}

function unfilterPaeth(row: Uint8Array, above: Uint8Array, pixelBytes: number): void {
  for (let i = 1; i <= pixelBytes && i < row.length; i++) row[i] += above[i]
  for (let i = pixelBytes + 1; i < row.length; i++) {
    const left = row[i - pixelBytes]
    const up = above[i]
    const corner = above[i - pixelBytes]
    let toLeft = up - corner
    let toUp = left - corner
    let toCorner = toLeft + toUp
    if (toLeft < 0) toLeft = -toLeft
    if (toUp < 0) toUp = -toUp
    if (toCorner < 0) toCorner = -toCorner
    row[i] += toLeft <= toUp && toLeft <= toCorner ? left : toUp <= toCorner ? up : corner
  }
}
