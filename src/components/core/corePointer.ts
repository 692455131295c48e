import { setTransectWidth } from '../../commands/reviseTransect.ts'
import { moveTransect } from '../../commands/moveTransect.ts'
import { marks } from '../../document/layerSet.ts'
import type { Session } from '../../session/session.svelte.ts'
import { hitBoundary, hitTransectHandle } from '../../view/hitTest.ts'
import { nearest } from '../../view/sorted.ts'
import type { TransectHandle, UprightTransect } from '../../view/strip/data.ts'
import { overviewViewport } from '../../view/strip/overview.ts'
import { toAcross } from '../../view/tiles.ts'
import { toScan } from '../../view/upright.ts'
import type { UprightPoint } from '../../view/upright.ts'
import { toAxis, toScreen } from '../../view/viewport.ts'
import { scanPixels } from '../../../worker/units.ts'
import { columnAt, headroom } from './columns.ts'
import type { ColumnName, Columns } from './columns.ts'
import type { CorePicture } from './corePicture.svelte.ts'
import type { CoreState } from './coreState.svelte.ts'

/** How far a press may move and still be a click, CSS pixels. */
const clickSlack = 4

type Drag =
  | { kind: 'click'; x: number; y: number; column: ColumnName }
  | { kind: 'pan'; x: number; y: number }
  | { kind: 'overview' }
  | { kind: 'boundary'; id: number }
  | { kind: 'transect'; handle: TransectHandle; from: UprightPoint; start: UprightTransect }

interface Around {
  columns: Columns
  picture: CorePicture
}

/** Turns presses, drags and wheels over the core into view changes, and into one command when let go. */
export class CorePointer {
  #session: Session
  #core: CoreState
  #around: () => Around
  #drag: Drag | null = null

  constructor(session: Session, core: CoreState, around: () => Around) {
    this.#session = session
    this.#core = core
    this.#around = around
  }

  get cursorShape(): string {
    if (this.#core.tool === 'ruler' && this.#session.step === 'scan') return 'crosshair'
    return this.#core.handle ? 'grab' : 'default'
  }

  wheel(event: WheelEvent): void {
    event.preventDefault()
    const lines = event.deltaMode === 1 ? 16 : event.deltaMode === 2 ? this.#core.viewport.height : 1
    const y = event.offsetY - headroom
    // A pinch on a touch pad arrives as a wheel with the control key.
    if (event.ctrlKey || event.metaKey) this.#core.zoom(Math.exp(-event.deltaY * lines * 0.01), y)
    else if (event.shiftKey) this.#core.zoom(Math.exp(-(event.deltaY || event.deltaX) * lines * 0.0025), y)
    else {
      this.#core.scroll(event.deltaY * lines)
      this.#core.slide(event.deltaX * lines)
    }
  }

  down(event: PointerEvent): void {
    if (event.button !== 0 && event.button !== 1) return
    ;(event.currentTarget as Element).setPointerCapture(event.pointerId)
    const column = columnAt(this.#around().columns, event.offsetX)
    const y = event.offsetY - headroom
    if (!column || event.button === 1) {
      this.#drag = { kind: 'pan', x: event.offsetX, y }
      return
    }
    if (column === 'overview') {
      this.#drag = { kind: 'overview' }
      this.#goByOverview(y)
      return
    }
    this.#drag = this.#grasp(column, event.offsetX, y) ?? { kind: 'click', x: event.offsetX, y, column }
  }

  move(event: PointerEvent): void {
    const y = event.offsetY - headroom
    const point = this.#point(event.offsetX, y)
    const { columns } = this.#around()
    this.#core.pointer = columnAt(columns, event.offsetX) === 'overview' || y < 0 ? null : point
    const drag = this.#drag
    if (!drag) {
      this.#hover(event.offsetX, y)
    } else if (drag.kind === 'overview') {
      this.#goByOverview(y)
    } else if (drag.kind === 'pan') {
      this.#core.scroll(drag.y - y)
      this.#core.slide(drag.x - event.offsetX)
      this.#drag = { kind: 'pan', x: event.offsetX, y }
    } else if (drag.kind === 'boundary') {
      this.#core.dragged = { id: drag.id, axis: point.axis }
    } else if (drag.kind === 'transect') {
      this.#core.draft = dragged(drag.start, drag.handle, drag.from, point)
    } else if (Math.hypot(event.offsetX - drag.x, y - drag.y) > clickSlack) {
      this.#drag = { kind: 'pan', x: event.offsetX, y }
    }
  }

  up(event: PointerEvent): void {
    const drag = this.#drag
    this.#drag = null
    if (!drag) return
    if (drag.kind === 'click') this.#click(event, drag.column)
    if (drag.kind === 'boundary') this.#letGoBoundary(drag.id)
    if (drag.kind === 'transect') this.#letGoTransect(drag.handle)
  }

  cancel(): void {
    this.#drag = null
    this.#core.draft = null
    this.#core.dragged = null
  }

  /** A double click sets a boundary where there is none. */
  doubleClick(event: MouseEvent): void {
    const { columns, picture } = this.#around()
    const column = columnAt(columns, event.offsetX)
    if (this.#session.step !== 'count' || !column || column === 'overview') return
    const y = event.offsetY - headroom
    if (picture.boundaries && hitBoundary(this.#core.viewport, picture.boundaries.position, y) >= 0) return
    this.#session.counting.placeAt(picture.axisToPath(this.#point(event.offsetX, y).axis))
  }

  #point(x: number, y: number): UprightPoint {
    const { columns, picture } = this.#around()
    const { scan } = columns.frames
    return {
      axis: toAxis(this.#core.viewport, y),
      across: toAcross(picture.across(scan.width), scan.width, x - scan.x),
    }
  }

  /** What can be dragged from here, if anything. */
  #grasp(column: ColumnName, x: number, y: number): Drag | null {
    const { picture } = this.#around()
    const core = this.#core
    if (this.#session.step === 'scan') {
      const handle = core.tool === 'transect' ? this.#handleAt(column, x, y) : null
      if (!handle || !picture.upright) return null
      core.handle = handle
      return { kind: 'transect', handle, from: this.#point(x, y), start: picture.upright }
    }
    // A boundary can only be dragged once the cursor stands on it, so that a scroll never moves one by accident.
    const { counting } = this.#session
    if (this.#session.step !== 'count' || counting.stop?.kind !== 'mark' || picture.cursorAxis === null) return null
    if (Math.abs(toScreen(core.viewport, picture.cursorAxis) - y) > 6) return null
    return { kind: 'boundary', id: counting.layers.id[counting.stop.index] }
  }

  #handleAt(column: ColumnName, x: number, y: number): TransectHandle | null {
    const { columns, picture } = this.#around()
    const { scan } = columns.frames
    if (column !== 'scan' || !picture.upright) return null
    return hitTransectHandle(
      this.#core.viewport,
      picture.across(scan.width),
      scan.width,
      picture.upright,
      x - scan.x,
      y,
    )
  }

  #hover(x: number, y: number): void {
    const column = columnAt(this.#around().columns, x)
    const editing = this.#session.step === 'scan' && this.#core.tool === 'transect'
    this.#core.handle = editing && column ? this.#handleAt(column, x, y) : null
  }

  #click(event: PointerEvent, column: ColumnName): void {
    const point = this.#point(event.offsetX, event.offsetY - headroom)
    if (this.#session.step === 'scan') {
      if (this.#core.tool === 'ruler' && column === 'scan') this.#addRulerEnd(point)
      return
    }
    const { counting } = this.#session
    counting.goTo(this.#snapped(point.axis), event.shiftKey)
  }

  #addRulerEnd(point: UprightPoint): void {
    const { ruler } = this.#core
    this.#core.ruler = ruler.length === 2 ? [point] : [...ruler, point]
  }

  /** The boundary or proposal near an axis position, else the position itself; path pixels. */
  #snapped(axis: number): number {
    const { picture } = this.#around()
    const { counting } = this.#session
    const reach = 8 / this.#core.viewport.scale
    const candidates: [Float64Array | undefined, Float64Array][] = [
      [picture.boundaries?.position, counting.layers.position],
      [picture.proposals.position, counting.proposals.position],
    ]
    let best = picture.axisToPath(axis)
    let least = reach
    for (const [onAxis, onPath] of candidates) {
      const index = onAxis ? nearest(onAxis, axis) : -1
      if (!onAxis || index < 0 || !(Math.abs(onAxis[index] - axis) < least)) continue
      least = Math.abs(onAxis[index] - axis)
      best = onPath[index]
    }
    return best
  }

  #goByOverview(y: number): void {
    this.#core.goTo(toAxis(overviewViewport(this.#core.viewport), y))
  }

  #letGoBoundary(id: number): void {
    const { dragged: moved } = this.#core
    this.#core.dragged = null
    if (moved) this.#session.counting.moveBoundary(id, this.#around().picture.axisToPath(moved.axis))
  }

  #letGoTransect(handle: TransectHandle): void {
    const { draft } = this.#core
    const { transect, section, workbench } = this.#session
    this.#core.draft = null
    if (!draft || !transect || !section) return
    if (handle.kind === 'edge') {
      workbench.dispatch(setTransectWidth(workbench.state, { transect: transect.id, width: scanPixels(draft.width) }))
      return
    }
    const points = draft.points.map((point) =>
      toScan(inside(point, section.scan, section.orientation), section.scan, section.orientation),
    )
    workbench.dispatch(moveTransect(workbench.state, { transect: transect.id, points }))
  }
}

export const rejectedMark = marks.indexOf('rejected')

/** Keeps a dragged point on the scan. */
function inside(
  point: UprightPoint,
  size: { width: number; height: number },
  orientation: { axis: 'x' | 'y' },
): UprightPoint {
  const [length, breadth] = orientation.axis === 'x' ? [size.width, size.height] : [size.height, size.width]
  return { axis: Math.min(length, Math.max(0, point.axis)), across: Math.min(breadth, Math.max(0, point.across)) }
}

/** The transect as it is while a handle is dragged from one point to another. */
function dragged(
  start: UprightTransect,
  handle: TransectHandle,
  from: UprightPoint,
  to: UprightPoint,
): UprightTransect {
  const moveBy = (point: UprightPoint): UprightPoint => ({
    axis: point.axis + to.axis - from.axis,
    across: point.across + to.across - from.across,
  })
  if (handle.kind === 'edge') {
    const growth = (to.across - from.across) * (handle.side === 'right' ? 2 : -2)
    return { points: start.points, width: Math.max(1, start.width + growth) }
  }
  if (handle.kind === 'point') {
    return { ...start, points: start.points.map((point, i) => (i === handle.index ? moveBy(point) : point)) }
  }
  // The path itself moves sideways as a whole; its ends keep their depth.
  return {
    ...start,
    points: start.points.map((point) => ({ axis: point.axis, across: point.across + to.across - from.across })),
  }
}
