import { describe, expect, it } from 'vitest'
import { cssText, cssTokens, darkTheme, lightTheme, printTheme } from '../../../src/view/theme.ts'
import type { Theme } from '../../../src/view/theme.ts'

/** Relative luminance of an sRGB colour (WCAG 2.2, "relative luminance"). */
function luminance(colour: string): number {
  const [r, g, b] = [1, 3, 5].map((i) => {
    const share = parseInt(colour.slice(i, i + 2), 16) / 255
    return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4
  })
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}

/** Contrast ratio of two colours (WCAG 2.2, "contrast ratio"). */
function contrast(a: string, b: string): number {
  const [dark, light] = [luminance(a), luminance(b)].sort((x, y) => x - y)
  return (light + 0.05) / (dark + 0.05)
}

const themes: Theme[] = [lightTheme, darkTheme, printTheme]

describe('the contrast measure', () => {
  it('gives 21 for black on white and 1 for a colour on itself', () => {
    expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 9)
    expect(contrast('#777777', '#777777')).toBe(1)
  })
  it('gives 4.54 for #767676 on white, the greyest text that WCAG lets pass', () => {
    expect(contrast('#767676', '#ffffff')).toBeCloseTo(4.54, 2)
  })
})

describe.each(themes)('the $name theme', (theme) => {
  it('sets all text at 4.5:1 or more, on the ground and on fields alike', () => {
    for (const behind of [theme.ground, theme.field]) {
      for (const text of [theme.ink, theme.quiet, theme.accent]) {
        expect(contrast(text, behind)).toBeGreaterThanOrEqual(4.5)
      }
    }
    expect(contrast(theme.onAccent, theme.accent)).toBeGreaterThanOrEqual(4.5)
    expect(contrast(theme.ink, theme.accentWash)).toBeGreaterThanOrEqual(4.5)
    expect(contrast(theme.accent, theme.accentWash)).toBeGreaterThanOrEqual(4.5)
  })

  it('sets all marks at 3:1 or more', () => {
    for (const behind of [theme.ground, theme.field]) {
      expect(contrast(theme.faint, behind)).toBeGreaterThanOrEqual(3)
    }
  })

  it('cases marks over the sediment so that line and casing stand apart', () => {
    expect(contrast(theme.overScan.line, theme.overScan.casing)).toBeGreaterThanOrEqual(4.5)
    expect(contrast(theme.overScan.accent, theme.overScan.casing)).toBeGreaterThanOrEqual(4.5)
  })

  it('is neutral but for the accent', () => {
    const neutral = [
      theme.ground,
      theme.field,
      theme.ink,
      theme.quiet,
      theme.faint,
      theme.hairline,
      theme.bandWide,
      theme.bandNarrow,
    ]
    for (const colour of neutral) expect(colour).toMatch(/^#(..)\1\1$/)
  })
})

describe('the print theme', () => {
  it('has no colour at all', () => {
    const colours = JSON.stringify(printTheme).match(/#[0-9a-f]{6}/g) ?? []
    expect(colours.length).toBeGreaterThan(8)
    for (const colour of colours) expect(colour).toMatch(/^#(..)\1\1$/)
  })
})

describe('the tokens for the components', () => {
  it('are the same values under their CSS names', () => {
    const tokens = cssTokens(darkTheme)
    expect(tokens['--ink']).toBe(darkTheme.ink)
    expect(tokens['--over-scan-line']).toBe(darkTheme.overScan.line)
    expect(tokens['--size-text']).toBe('12px')
    expect(tokens['--name']).toBeUndefined()
    expect(cssText(lightTheme)).toContain(`--accent-wash: ${lightTheme.accentWash};`)
  })
})
