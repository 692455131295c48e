/** Branded units: a number that says what it measures. They cost nothing at run time and stop a pixel being read as a millimetre. */

declare const unit: unique symbol
type Branded<Unit extends string> = number & { readonly [unit]: Unit }

/** Length or depth in the sediment. */
export type Millimetres = Branded<'mm'>
/** A coordinate in a scan's own pixel grid; pixel i covers [i, i + 1), its centre is i + 0.5. */
export type ScanPixels = Branded<'scan px'>
/** Distance along a transect from its first (youngest) point, in scan pixels. */
export type PathPixels = Branded<'path px'>
/** Astronomical calendar year: 0 is 1 BCE, -1 is 2 BCE (ISO 8601). */
export type CalYear = Branded<'cal a'>
/** Conventional radiocarbon age before 1950 (Stuiver & Polach 1977). */
export type C14Years = Branded<'14C a'>
/** A duration in calendar years. */
export type Years = Branded<'a'>

export const millimetres = (value: number) => value as Millimetres
export const scanPixels = (value: number) => value as ScanPixels
export const pathPixels = (value: number) => value as PathPixels
export const calYear = (value: number) => value as CalYear
export const c14Years = (value: number) => value as C14Years
export const years = (value: number) => value as Years

/** One rectangle of a scan, in scan pixels of the level it is read from: [x, x + width) by [y, y + height). */
export interface Region {
  x: number
  y: number
  width: number
  height: number
}

/** A point on a scan, in scan pixels (continuous; pixel centres at .5). */
export interface Point {
  x: ScanPixels
  y: ScanPixels
}
