import { describe, expect, it } from 'vitest'
import { defaultRecipe, parseRecipe } from '../../worker/core/recipe.ts'

describe('parseRecipe', () => {
  it('fills in what is left out', () => {
    expect(parseRecipe({})).toEqual(defaultRecipe)
    const recipe = parseRecipe({ candidates: { edge: 'base' }, detrend: { window: 120 } })
    expect(recipe.candidates).toEqual({ ...defaultRecipe.candidates, edge: 'base' })
    expect(recipe.detrend).toEqual({ ...defaultRecipe.detrend, window: 120 })
  })

  it('takes back what it gave, through JSON', () => {
    const recipe = parseRecipe({ profile: { channel: 'lightness', lanes: 5 }, ladder: { thickness: 22.5 } })
    expect(parseRecipe(JSON.parse(JSON.stringify(recipe)))).toEqual(recipe)
  })

  it('refuses anything but an object', () => {
    for (const json of [null, 7, 'dark', [1]])
      expect(() => parseRecipe(json)).toThrow(/^recipe must be an object; it is /)
    expect(() => parseRecipe({ ladder: null })).toThrow('recipe.ladder must be an object; it is null')
  })

  it('refuses names that no recipe has', () => {
    expect(() => parseRecipe({ peaks: {} })).toThrow(
      'recipe.peaks is unknown; recipe holds profile, detrend, candidates, ladder',
    )
    expect(() => parseRecipe({ candidates: { prominance: 1 } })).toThrow(
      'recipe.candidates.prominance is unknown; recipe.candidates holds lamina, edge, prominence, distance',
    )
    expect(() => parseRecipe(JSON.parse('{"profile":{"__proto__":{"lanes":3}}}'))).toThrow(
      'recipe.profile.__proto__ is unknown',
    )
  })

  it('names the field of a bad value', () => {
    const bad: [object, string][] = [
      [{ candidates: { prominence: '0.5' } }, 'recipe.candidates.prominence must be between 0 and 1000; it is "0.5"'],
      [{ profile: { across: 'max' } }, 'recipe.profile.across must be one of median, mean, trimmed; it is "max"'],
      [{ profile: { lanes: 2.5 } }, 'recipe.profile.lanes must be a whole number from 1 to 1000; it is 2.5'],
      [{ detrend: { smoothing: null } }, 'recipe.detrend.smoothing must be one of'],
      [{ ladder: { thickness: -3 } }, 'recipe.ladder.thickness must be between 1 and 10000000 path pixels, or null'],
    ]
    for (const [json, message] of bad) expect(() => parseRecipe(json)).toThrow(message)
  })
})
