export interface NumberRule {
  label: string
  unit: string
  least: number
  most: number
  optional: boolean
}

/**
 * Reads a number as people type it: decimal comma or point, a real minus sign, spaces between thousands.
 * Returns the value, or a sentence that says what is wrong.
 */
export function readNumber(text: string, rule: NumberRule): { value: number | null } | string {
  const plain = text
    .trim()
    .replace(/[\u2212\u2013]/g, '-')
    .replace(/[\s\u00a0\u2009\u202f]/g, '')
  if (plain === '') return rule.optional ? { value: null } : `${rule.label} needs a number.`
  const dotted = plain.includes('.') ? plain : plain.replace(',', '.')
  if (!/^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i.test(dotted)) return `“${text.trim()}” is not a number.`
  const value = Number(dotted)
  const unit = rule.unit ? ` ${rule.unit}` : ''
  if (!(value >= rule.least)) return `${rule.label} must be at least ${written(rule.least)}${unit}.`
  if (!(value <= rule.most)) return `${rule.label} must be at most ${written(rule.most)}${unit}.`
  return { value }
}

function written(value: number): string {
  return String(value).replace('-', '\u2212')
}
