import { formatNumber } from '../../view/numbers.ts'

const thin = '\u2009'

/** A value with its error, both to the two significant digits the error deserves. */
export function withError(value: number, error: number): string {
  const decimals = error > 0 ? Math.max(0, Math.min(3, 1 - Math.floor(Math.log10(error)))) : 0
  return `${formatNumber(value, decimals)} ± ${formatNumber(error, decimals)}`
}

/** Bytes in the unit a person would say. */
export function byteText(count: number): string {
  if (count < 1e3) return `${count}${thin}B`
  if (count < 1e6) return `${formatNumber(count / 1e3)}${thin}kB`
  if (count < 1e9) return `${formatNumber(count / 1e6, 1)}${thin}MB`
  return `${formatNumber(count / 1e9, 2)}${thin}GB`
}

/** One of a word, or many: `plural(1, 'layer')`, `plural(2, 'layer')`. */
export function plural(count: number, word: string, many = `${word}s`): string {
  return `${formatNumber(count)} ${count === 1 ? word : many}`
}
