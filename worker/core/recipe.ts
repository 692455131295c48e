import { describe, Fault } from '../check.ts'
import { checkCandidateRecipe, type CandidateRecipe } from './candidates.ts'
import { checkDetrendRecipe, type DetrendRecipe } from './detrend.ts'
import type { LadderRecipe } from './ladder.ts'
import { checkProfileRecipe, type ProfileRecipe } from './profile.ts'
import { checkLengthOrNull } from './recipeChecks.ts'

/** The full set of detection parameters; its defaults live here and nowhere else. */
export interface Recipe {
  profile: ProfileRecipe
  detrend: DetrendRecipe
  candidates: CandidateRecipe
  ladder: LadderRecipe
}

export const defaultRecipe: Recipe = {
  profile: { channel: 'luminance', linear: false, across: 'median', lanes: 9, usableShare: 0.3 },
  detrend: { method: 'moving-median', window: null, smoothing: 'gaussian', smoothingLength: null, standardise: true },
  candidates: { lamina: 'auto', edge: 'top', prominence: 0.1, distance: null },
  ladder: { thickness: null },
}

/**
 * A recipe from a file: what is left out takes its default. Throws a Fault that names the field for anything but an object,
 * for a name that no recipe has, and for a value out of its range.
 */
export function parseRecipe(json: unknown): Recipe {
  const parts = withDefaults('recipe', json, defaultRecipe)
  const recipe: Recipe = {
    profile: withDefaults('recipe.profile', parts.profile, defaultRecipe.profile),
    detrend: withDefaults('recipe.detrend', parts.detrend, defaultRecipe.detrend),
    candidates: withDefaults('recipe.candidates', parts.candidates, defaultRecipe.candidates),
    ladder: withDefaults('recipe.ladder', parts.ladder, defaultRecipe.ladder),
  }
  checkProfileRecipe(recipe.profile)
  checkDetrendRecipe(recipe.detrend)
  checkCandidateRecipe(recipe.candidates)
  checkLengthOrNull('recipe.ladder.thickness', recipe.ladder.thickness, 1)
  return recipe
}

/** The values of a JSON object over the defaults; their types are still to be checked. */
function withDefaults<Part extends object>(field: string, json: unknown, defaults: Part): Part {
  if (typeof json !== 'object' || json === null || Array.isArray(json)) {
    throw new Fault('argument', field, json, `${field} must be an object; it is ${describe(json)}`)
  }
  const known = Object.keys(defaults)
  for (const name of Object.keys(json)) {
    if (!known.includes(name)) {
      const place = `${field}.${name}`
      throw new Fault('argument', place, name, `${place} is unknown; ${field} holds ${known.join(', ')}`)
    }
  }
  return { ...defaults, ...(json as Partial<Part>) }
}
