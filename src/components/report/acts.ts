import type { Transaction } from '../../document/transaction.ts'
import type { Step } from '../../document/steps.ts'

const words: Record<string, string> = {
  accept: 'confirmed',
  reject: 'rejected',
  place: 'set',
  move: 'moved',
  mark: 'marked',
  remove: 'removed',
  split: 'split a layer with',
  join: 'joined layers across',
  note: 'wrote a note',
  'note.revise': 'changed a note',
  'note.remove': 'removed a note',
  undo: 'took back an edit',
  redo: 'did again what was taken back',
  demo: 'laid out the demo',
  agree: 'began the agreed count',
  settle: 'settled a difference',
  bring: 'brought counts home',
  packet: 'received a counting packet',
  section: 'added a section',
  count: 'began a count',
  'count.remove': 'removed a count',
  import: 'took in a count',
  span: 'set a span apart',
  'span.change': 'changed a span',
  'span.remove': 'removed a span',
  check: 'checked down to a place',
  core: 'changed the facts of the core',
  scale: 'set the scale',
  depth: 'set the depth',
  orientation: 'turned the scan',
  recipe: 'changed the recipe',
  'transect.move': 'moved the transect',
  'transect.width': 'changed the width of the transect',
  'transect.tilt': 'set the tilt of the beds',
}

/** What a transaction did, in a few words. */
export function acts({ userEvent, steps }: Transaction): string {
  const boundaries = steps.reduce((sum, step) => sum + boundariesOf(step), 0)
  const what = words[userEvent] ?? userEvent.replaceAll('.', ' ')
  if (!['accept', 'reject', 'place', 'move', 'mark', 'remove', 'split', 'join'].includes(userEvent)) return what
  return `${what} ${boundaries} ${boundaries === 1 ? 'boundary' : 'boundaries'}`
}

function boundariesOf(step: Step): number {
  if (step.kind === 'place' || step.kind === 'lift') return step.layers.id.length
  if (step.kind === 'move' || step.kind === 'mark') return step.id.length
  return 0
}
