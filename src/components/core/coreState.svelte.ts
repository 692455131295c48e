import type { Viewport } from '../../view/viewport.ts'
import { centre, fit, pan, resize, reveal, revealLayer, zoomAt } from '../../view/viewport.ts'
import type { UprightPoint } from '../../view/upright.ts'
import type { TransectHandle, UprightTransect } from '../../view/strip/data.ts'

/** What a press on the core does in the step Scan. */
export type Tool = 'transect' | 'ruler'

/** What of the core is in view, and what is being done on it: view state, never part of the document. */
export class CoreState {
  viewport = $state.raw<Viewport>(fit(1000, 600))
  tool = $state<Tool>('transect')
  /** How far the view was moved sideways off the transect, across pixels. */
  shift = $state(0)
  /** Where the pointer is, axis and across pixels. */
  pointer = $state.raw<UprightPoint | null>(null)
  /** The transect while it is dragged; becomes one transaction when let go. */
  draft = $state.raw<UprightTransect | null>(null)
  handle = $state.raw<TransectHandle | null>(null)
  /** A boundary while it is dragged: its id and its position, axis pixels. */
  dragged = $state.raw<{ id: number; axis: number } | null>(null)
  /** Ends of the ruler's stretch, as far as set. */
  ruler = $state.raw<readonly UprightPoint[]>([])
  /** Axis position to path pixels of the transect at hand; set by the picture. */
  toPath: (axis: number) => number = (axis) => axis
  #length = 0
  #scan = ''

  /** Fits a core that was not in view before; keeps the stretch when only the window changed. */
  frame(scan: string, length: number, height: number): void {
    if (scan !== this.#scan || length !== this.#length) {
      this.#scan = scan
      this.#length = length
      this.shift = 0
      this.viewport = fit(length, height)
    } else if (height !== this.viewport.height) {
      this.viewport = resize(this.viewport, height)
    }
  }

  scroll(dy: number): void {
    this.viewport = pan(this.viewport, dy)
  }

  zoom(factor: number, y = this.viewport.height / 2): void {
    this.viewport = zoomAt(this.viewport, y, factor)
  }

  /** Moves the view sideways by CSS pixels; a ruler or label beside the transect comes into sight. */
  slide(dx: number): void {
    this.shift += dx / this.viewport.scale
  }

  whole(): void {
    this.shift = 0
    this.viewport = fit(this.viewport.length, this.viewport.height)
  }

  goTo(axis: number): void {
    this.viewport = centre(this.viewport, axis)
  }

  /** Follows the cursor with context on both sides, close enough that a layer of this thickness can be judged. */
  follow(axis: number, thickness: number | null): void {
    this.viewport = thickness === null ? reveal(this.viewport, axis) : revealLayer(this.viewport, axis, thickness, 14)
  }
}
