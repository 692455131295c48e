/** Real minus sign, and the narrow space that does not break between groups of three figures. */
export const minus = '\u2212'
const narrowSpace = '\u202f'

/** A number for people: real minus sign, thousands set apart from 10 000 on (four figures read well unbroken). */
export function formatNumber(value: number, decimals = 0): string {
  if (!Number.isFinite(value)) return Number.isNaN(value) ? '–' : value > 0 ? '∞' : `${minus}∞`
  const [whole, part] = Math.abs(value).toFixed(decimals).split('.')
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, narrowSpace) : whole
  const digits = decimals === 0 ? grouped : `${grouped}.${part}`
  // A rounded zero carries no sign.
  return value < 0 && /[1-9]/.test(digits) ? minus + digits : digits
}

/** Decimals that a step needs: 0.25 two, 5 none. */
export function decimalsFor(step: number): number {
  for (let decimals = 0; decimals < 8; decimals++) {
    const scaled = step * 10 ** decimals
    if (Math.abs(scaled - Math.round(scaled)) < 1e-6 * Math.max(1, scaled)) return decimals
  }
  return 8
}

/** An astronomical year in the common era's words: 0 is 1 BCE; CE is written where `era` asks for it. */
export function formatYearCE(year: number, era = false): string {
  const whole = Math.round(year)
  return whole > 0 ? `${whole}${era ? ' CE' : ''}` : `${1 - whole} BCE`
}
