/**
 * Advance widths of a common grotesque, in thousandths of the type size, for layouts without a canvas (figures made
 * headless, tests). From memory of the widths that most sans-serif faces share within a few per cent; a figure leaves that
 * much room beside its labels.
 */
const widths: Record<string, number> = {}
const set = (letters: string, width: number) => {
  for (const letter of letters) widths[letter] = width
}
set("ijl'|", 222)
set(' .,:;/\\![]It\u00a0', 278)
set('-f()r`{}\u00b7', 333)
set('*°"', 389)
set('kcsvxyzJ', 500)
set('0123456789abdeghnopqu?_L$#', 556)
set('+=<>~\u2212±×\u2212', 584)
set('FTZ', 611)
set('ABEKPSVXY&', 667)
set('wCDHNRU', 722)
set('GOQ', 778)
set('mM', 833)
set('%W', 900)
set('@—', 1000)
set('–\u2002', 500)
set('\u202f\u2009', 200)
set('⁻⁰¹²³⁴⁵⁶⁷⁸⁹', 350)

/** Width of a line of text, in units of `size`. */
export function typeWidth(text: string, size: number, weight: 'normal' | 'bold' = 'normal'): number {
  let sum = 0
  for (const letter of text) sum += widths[letter] ?? 600
  return (sum / 1000) * size * (weight === 'bold' ? 1.06 : 1)
}
