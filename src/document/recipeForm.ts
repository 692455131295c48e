/**
 * The form of a recipe in files and steps. A field added to the Recipe must be added here too: the compiler insists.
 *
 * Exports: `readRecipe`.
 */
import type { Recipe } from '../../worker/core/recipe.ts'
import { above, flag, nullable, oneOf, recordOf, whole, within } from './form.ts'

const pathLengths = above(0, 1e7)

export const readRecipe = recordOf<Recipe>({
  profile: recordOf<Recipe['profile']>({
    channel: oneOf('luminance', 'lightness', 'red', 'green', 'blue'),
    linear: flag,
    across: oneOf('median', 'mean', 'trimmed'),
    lanes: whole(1, 1000),
    usableShare: within(0, 1),
  }),
  detrend: recordOf<Recipe['detrend']>({
    method: oneOf('moving-median', 'moving-mean', 'loess', 'high-pass', 'none'),
    window: nullable(pathLengths),
    smoothing: oneOf('savitzky-golay', 'gaussian', 'none'),
    smoothingLength: nullable(pathLengths),
    standardise: flag,
  }),
  candidates: recordOf<Recipe['candidates']>({
    lamina: oneOf('dark', 'light', 'auto'),
    edge: oneOf('top', 'middle', 'base'),
    prominence: within(0, 1e6),
    distance: nullable(pathLengths),
  }),
  ladder: recordOf<Recipe['ladder']>({
    thickness: nullable(pathLengths),
  }),
})
