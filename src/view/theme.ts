/**
 * The look, as plain values: neutral greys, one accent for what is being acted on, nothing else with a colour of its own.
 * Painters take these values; components take the same ones as CSS custom properties from `cssTokens`.
 */
export interface Theme {
  readonly name: 'light' | 'dark' | 'print'
  /** Behind everything. */
  readonly ground: string
  /** Behind a column or a field that takes input; barely apart from the ground. */
  readonly field: string
  /** Text and the marks that count. */
  readonly ink: string
  /** Secondary text: units, captions, tick labels. */
  readonly quiet: string
  /** Marks that only propose: proposals, other counters, running means of lesser weight. At least 3:1 on the ground. */
  readonly faint: string
  /** Rules, frames and grids; not needed to understand anything. */
  readonly hairline: string
  /** Wide and narrow uncertainty bands, textures behind marks. */
  readonly bandWide: string
  readonly bandNarrow: string
  /** The one accent, for what is being acted on. */
  readonly accent: string
  /** Text on the accent. */
  readonly onAccent: string
  /** A wash of the accent behind a selection. */
  readonly accentWash: string
  /** Over the sediment itself, which may have any brightness: a line, and the casing that keeps it visible. */
  readonly overScan: { readonly line: string; readonly casing: string; readonly accent: string }
  readonly font: string
  /** Sizes of type, surface units. */
  readonly size: { readonly text: number; readonly small: number; readonly tiny: number }
  /** Widths of lines, surface units. */
  readonly stroke: { readonly hair: number; readonly thin: number; readonly strong: number }
}

/** Grotesques whose figures are all of one width, so that numbers on a canvas stand in columns. */
const font = '"Helvetica Neue", Helvetica, Arial, "Liberation Sans", "Noto Sans", sans-serif'
const size = { text: 12, small: 11, tiny: 9.5 }
// 1.2 is one device pixel on a plain screen and two on a fine one; 1.25 would be rounded up to three there.
const stroke = { hair: 1, thin: 1.2, strong: 2 }

export const lightTheme: Theme = {
  name: 'light',
  ground: '#fbfbfb',
  field: '#f3f3f3',
  ink: '#1c1c1c',
  quiet: '#5e5e5e',
  faint: '#858585',
  hairline: '#d6d6d6',
  bandWide: '#e4e4e4',
  bandNarrow: '#cbcbcb',
  accent: '#0b5fcc',
  onAccent: '#ffffff',
  accentWash: '#dce8f8',
  overScan: { line: '#ffffff', casing: '#000000', accent: '#4aa3ff' },
  font,
  size,
  stroke,
}

export const darkTheme: Theme = {
  name: 'dark',
  ground: '#161616',
  field: '#1f1f1f',
  ink: '#ebebeb',
  quiet: '#a6a6a6',
  faint: '#7d7d7d',
  hairline: '#383838',
  bandWide: '#2b2b2b',
  bandNarrow: '#444444',
  accent: '#6cb2ff',
  onAccent: '#0c1420',
  accentWash: '#1c2f45',
  overScan: { line: '#ffffff', casing: '#000000', accent: '#4aa3ff' },
  font,
  size,
  stroke,
}

/** Black on white for figures: survives a photocopier, so the accent is black too and every state differs in shape. */
export const printTheme: Theme = {
  name: 'print',
  ground: '#ffffff',
  field: '#ffffff',
  ink: '#000000',
  quiet: '#333333',
  faint: '#6b6b6b',
  hairline: '#b0b0b0',
  bandWide: '#e2e2e2',
  bandNarrow: '#c2c2c2',
  accent: '#000000',
  onAccent: '#ffffff',
  accentWash: '#e2e2e2',
  overScan: { line: '#ffffff', casing: '#000000', accent: '#ffffff' },
  font: 'sans-serif',
  size,
  stroke: { hair: 0.6, thin: 1, strong: 1.8 },
}

/** The theme as CSS custom properties, name without value's unit added: `--ink`, `--over-scan-line`, `--size-text` … */
export function cssTokens(theme: Theme): Record<string, string> {
  const tokens: Record<string, string> = {}
  for (const [name, value] of Object.entries(theme)) {
    if (name === 'name') continue
    if (typeof value === 'string') tokens[`--${kebab(name)}`] = value
    else {
      for (const [part, inner] of Object.entries(value as Record<string, string | number>)) {
        tokens[`--${kebab(name)}-${kebab(part)}`] = typeof inner === 'number' ? `${inner}px` : inner
      }
    }
  }
  return tokens
}

/** The same as the text of one style attribute or rule body. */
export function cssText(theme: Theme): string {
  return Object.entries(cssTokens(theme))
    .map(([name, value]) => `${name}: ${value};`)
    .join(' ')
}

function kebab(name: string): string {
  return name.replace(/[A-Z]/g, (letter) => `-${letter.toLowerCase()}`)
}
