import type { CandidateRecipe } from './candidates.ts'
import type { DetrendRecipe } from './detrend.ts'
import type { LadderRecipe } from './ladder.ts'
import type { ProfileRecipe } from './profile.ts'

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
