import type { Session, StepId } from '../session/session.svelte.ts'
import { steps } from '../session/session.svelte.ts'
import { keySwitch } from './keySwitch.svelte.ts'
import type { CoreState } from './core/coreState.svelte.ts'
import { toAxis, visibleRange } from '../view/viewport.ts'

interface Act {
  session: Session
  core: CoreState
}

/** One key: how it is written, what it does in words, when it works, and the act itself. */
export interface Key {
  /** `event.key`, lower case for letters. */
  key: string
  shift?: boolean
  control?: boolean
  alt?: boolean
  /** How the key is written in the list; default: the key. */
  written?: string
  does: string
  group: 'Move' | 'Judge' | 'Edit' | 'Spans' | 'Compare' | 'View' | 'Page'
  /** Steps in which it works; default: all. */
  steps?: readonly StepId[]
  act: (around: Act) => void
}

const counting: readonly StepId[] = ['count', 'compare', 'date', 'rates', 'report']
const bench: readonly StepId[] = ['count']
const comparing: readonly StepId[] = ['compare']
/** Nudges in path pixels. */
const fine = 0.25
const coarse = 2

/** All keys of the page: the list shown by `?` and the acts behind them are the same table. */
export const keys: readonly Key[] = [
  {
    key: 'ArrowDown',
    written: '↓',
    does: 'next boundary or proposal',
    group: 'Move',
    steps: counting,
    act: ({ session }) => session.counting.step(1),
  },
  {
    key: 'ArrowUp',
    written: '↑',
    does: 'previous boundary or proposal',
    group: 'Move',
    steps: counting,
    act: ({ session }) => session.counting.step(-1),
  },
  {
    key: 'ArrowDown',
    shift: true,
    written: 'Shift ↓',
    does: 'select on to the next',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.step(1, true),
  },
  {
    key: 'ArrowUp',
    shift: true,
    written: 'Shift ↑',
    does: 'select back to the previous',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.step(-1, true),
  },
  {
    key: 'n',
    does: 'next proposal still open',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.toNextOpen(1),
  },
  {
    key: 'n',
    shift: true,
    written: 'Shift N',
    does: 'previous proposal still open',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.toNextOpen(-1),
  },
  {
    key: 'q',
    does: 'next doubtful boundary',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.toNextDoubtful(1),
  },
  {
    key: 'q',
    shift: true,
    written: 'Shift Q',
    does: 'previous doubtful boundary',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.toNextDoubtful(-1),
  },
  {
    key: 'g',
    does: 'first place not checked yet',
    group: 'Move',
    steps: bench,
    act: ({ session }) => session.counting.toNextUnchecked(),
  },
  {
    key: 'v',
    does: 'least certain place first, then the next',
    group: 'Move',
    steps: bench,
    act: ({ session }) => toMostInformative(session),
  },

  {
    key: 'Enter',
    does: 'confirm as a year and go on',
    group: 'Judge',
    steps: bench,
    act: ({ session }) => session.counting.confirm(),
  },
  {
    key: 'd',
    does: 'mark doubtful and go on',
    group: 'Judge',
    steps: bench,
    act: ({ session }) => session.counting.doubt(),
  },
  {
    key: 'x',
    does: 'reject, no year, and go on',
    group: 'Judge',
    steps: bench,
    act: ({ session }) => session.counting.reject(),
  },
  {
    key: 'Enter',
    shift: true,
    written: 'Shift Enter',
    does: 'confirm every open proposal down to the foot of the view',
    group: 'Judge',
    steps: bench,
    act: confirmView,
  },
  {
    key: '.',
    does: 'the same again, here',
    group: 'Judge',
    steps: bench,
    act: ({ session }) => session.counting.repeat(),
  },

  {
    key: 'b',
    does: 'set a boundary at the pointer, or at the cursor',
    group: 'Edit',
    steps: bench,
    act: placeBoundary,
  },
  {
    key: 's',
    does: 'split the layer below into two years',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.split(),
  },
  {
    key: 'j',
    does: 'join the layers on either side into one year',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.join(),
  },
  {
    key: 'm',
    does: 'memo: write a note here',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => (session.counting.writing = session.counting.cursor !== null),
  },
  {
    key: 'Delete',
    does: 'remove the boundary',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.remove(),
  },
  {
    key: 'Backspace',
    does: 'remove the boundary',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.remove(),
  },
  {
    key: 'ArrowLeft',
    written: '←',
    does: 'move it younger by a quarter pixel',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.nudge(-fine),
  },
  {
    key: 'ArrowRight',
    written: '→',
    does: 'move it older by a quarter pixel',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.nudge(fine),
  },
  {
    key: 'ArrowLeft',
    shift: true,
    written: 'Shift ←',
    does: 'move it younger by two pixels',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.nudge(-coarse),
  },
  {
    key: 'ArrowRight',
    shift: true,
    written: 'Shift →',
    does: 'move it older by two pixels',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.nudge(coarse),
  },
  {
    key: 'c',
    does: 'everything down to here is checked',
    group: 'Edit',
    steps: bench,
    act: ({ session }) => session.counting.checkToCursor(),
  },

  {
    key: 'e',
    does: 'event bed: begin here, then end here',
    group: 'Spans',
    steps: bench,
    act: ({ session }) => session.counting.markSpan('event'),
  },
  {
    key: 'u',
    does: 'unreadable: begin here, then end here',
    group: 'Spans',
    steps: bench,
    act: ({ session }) => session.counting.markSpan('unreadable'),
  },
  {
    key: 'h',
    does: 'hiatus at this place',
    group: 'Spans',
    steps: bench,
    act: ({ session }) => session.counting.markSpan('hiatus'),
  },
  {
    key: 'r',
    does: 'remove the span under the cursor',
    group: 'Spans',
    steps: bench,
    act: ({ session }) => session.counting.removeSpan(),
  },
  { key: 'Escape', does: 'leave selection or span', group: 'Spans', act: ({ session, core }) => leave(session, core) },

  {
    key: 'n',
    does: 'next difference',
    group: 'Compare',
    steps: comparing,
    act: ({ session }) => session.settling.toNext(1),
  },
  {
    key: 'n',
    shift: true,
    written: 'Shift N',
    does: 'previous difference',
    group: 'Compare',
    steps: comparing,
    act: ({ session }) => session.settling.toNext(-1),
  },
  {
    key: 'y',
    does: 'settle it: a year',
    group: 'Compare',
    steps: comparing,
    act: ({ session }) => session.settling.settle('certain'),
  },
  {
    key: 'd',
    does: 'settle it: doubtful',
    group: 'Compare',
    steps: comparing,
    act: ({ session }) => session.settling.settle('doubtful'),
  },
  {
    key: 'x',
    does: 'settle it: no year',
    group: 'Compare',
    steps: comparing,
    act: ({ session }) => session.settling.settle('rejected'),
  },

  { key: '+', does: 'closer', group: 'View', act: ({ core }) => core.zoom(1.5, focus(core)) },
  { key: '=', written: '=', does: 'closer', group: 'View', act: ({ core }) => core.zoom(1.5, focus(core)) },
  { key: '-', written: '−', does: 'farther', group: 'View', act: ({ core }) => core.zoom(1 / 1.5, focus(core)) },
  { key: '0', does: 'the whole core', group: 'View', act: ({ core }) => core.whole() },
  {
    key: 'PageDown',
    written: 'Page ↓',
    does: 'a page downcore',
    group: 'View',
    act: ({ core }) => core.scroll(core.viewport.height * 0.85),
  },
  {
    key: 'PageUp',
    written: 'Page ↑',
    does: 'a page upcore',
    group: 'View',
    act: ({ core }) => core.scroll(core.viewport.height * -0.85),
  },
  { key: 'Home', does: 'young end', group: 'View', act: ({ core }) => core.goTo(0) },
  { key: 'End', does: 'old end', group: 'View', act: ({ core }) => core.goTo(core.viewport.length) },

  {
    key: 'z',
    control: true,
    written: 'Ctrl Z',
    does: 'undo',
    group: 'Page',
    act: ({ session }) => session.workbench.undo(),
  },
  {
    key: 'z',
    control: true,
    shift: true,
    written: 'Ctrl Shift Z',
    does: 'redo',
    group: 'Page',
    act: ({ session }) => session.workbench.redo(),
  },
  ...steps.map(({ id, name }, index): Key => ({
    key: String(index + 1),
    alt: true,
    written: `Alt ${index + 1}`,
    does: `step ${name}`,
    group: 'Page',
    act: ({ session }) => (session.step = id),
  })),
]

/** Performs the act of a key; false when it has none here. */
export function pressedKey(event: KeyboardEvent, session: Session, core: CoreState): boolean {
  const name = event.key.length === 1 ? event.key.toLowerCase() : event.key
  // On buttons and check boxes the Enter key and the space bar belong to the control itself.
  if (name === 'Enter' && event.target instanceof HTMLElement && event.target.matches('button, a, summary, input'))
    return false
  if (name.length === 1 && !keySwitch.letters && !event.ctrlKey && !event.metaKey && !event.altKey && !onBench(event))
    return false
  const key = keys.find(
    (one) =>
      one.key === name &&
      (one.shift ?? false) === (event.shiftKey && name !== '+') &&
      (one.control ?? false) === (event.ctrlKey || event.metaKey) &&
      (one.alt ?? false) === event.altKey &&
      (one.steps?.includes(session.step) ?? true),
  )
  key?.act({ session, core })
  return key !== undefined
}

function onBench({ target }: KeyboardEvent): boolean {
  return target instanceof Element && target.closest('[data-bench]') !== null
}

/** To the least certain place, with the focus on the bench: Enter there is to confirm, not to press a button again. */
export function toMostInformative(session: Session): void {
  if (session.counting.toMostInformative()) document.querySelector<HTMLElement>('[data-bench]')?.focus()
}

/** Zooming by key keeps what is looked at: the pointer's place while it is over the core, else the middle. */
function focus(core: CoreState): number {
  return core.pointer ? (core.pointer.axis - core.viewport.top) * core.viewport.scale : core.viewport.height / 2
}

function confirmView({ session, core }: Act): void {
  const foot = Math.min(core.viewport.length, visibleRange(core.viewport)[1])
  session.counting.confirmTo(core.toPath(foot))
}

function placeBoundary({ session, core }: Act): void {
  const { counting } = session
  const at = core.pointer
    ? core.toPath(core.pointer.axis)
    : (counting.cursor ?? core.toPath(toAxis(core.viewport, core.viewport.height / 2)))
  counting.placeAt(at)
}

function leave(session: Session, core: CoreState): void {
  session.counting.escape()
  core.ruler = []
  core.tool = 'transect'
}
