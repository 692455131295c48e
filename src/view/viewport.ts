/**
 * What stretch of the core is on screen, and how large. One value for the scan, the profile, the ladder and all else
 * beside the core, so that they scroll and zoom as one. Immutable: every function returns a new value.
 *
 * Axis pixels run downcore from the young end, in scan pixels along the core axis. Screen pixels are CSS pixels below
 * the top edge of the view.
 */
export interface Viewport {
  /** Length of the core, axis pixels. */
  readonly length: number
  /** Height of the view, CSS pixels. */
  readonly height: number
  /** Axis position at the top edge; negative when there is air above the core. */
  readonly top: number
  /** CSS pixels per axis pixel. */
  readonly scale: number
}

/** Air left above the young end and below the base, CSS pixels, so that the outermost boundaries can be seen and grasped. */
export const air = 14
/** Largest magnification, CSS pixels per scan pixel: single pixels can be told apart and pointed at. */
export const closest = 12

/** The whole core, from end to end. */
export function fit(length: number, height: number): Viewport {
  const core = Math.max(1, length)
  return clamp({ length: core, height: Math.max(1, height), top: 0, scale: fitScale(core, height) })
}

/** Smallest and largest scale of a view: from the whole core to single pixels. */
export function scaleLimits(view: Viewport): [least: number, most: number] {
  const least = fitScale(view.length, view.height)
  return [least, Math.max(closest, least)]
}

/** Nearest view within the limits of zoom and scroll. */
export function clamp(view: Viewport): Viewport {
  const [least, most] = scaleLimits(view)
  const scale = Math.min(most, Math.max(least, view.scale))
  const first = -air / scale
  const last = view.length - (view.height - air) / scale
  // At the smallest scale the core is as long as the view allows: it is centred and cannot be scrolled.
  const top = last - first <= 1e-6 / scale ? (first + last) / 2 : Math.min(last, Math.max(first, view.top))
  return scale === view.scale && top === view.top ? view : { ...view, scale, top }
}

export function toScreen(view: Viewport, axis: number): number {
  return (axis - view.top) * view.scale
}

export function toAxis(view: Viewport, y: number): number {
  return y / view.scale + view.top
}

/** Axis positions at the top and the bottom edge; may reach beyond the core. */
export function visibleRange(view: Viewport): [from: number, to: number] {
  return [view.top, view.top + view.height / view.scale]
}

/** Scrolls by CSS pixels; positive moves downcore. */
export function pan(view: Viewport, dy: number): Viewport {
  return clamp({ ...view, top: view.top + dy / view.scale })
}

/** Magnifies by a factor; what lies at `y` CSS pixels stays there as long as the core's ends allow it. */
export function zoomAt(view: Viewport, y: number, factor: number): Viewport {
  const [least, most] = scaleLimits(view)
  const scale = Math.min(most, Math.max(least, view.scale * factor))
  return clamp({ ...view, scale, top: toAxis(view, y) - y / scale })
}

/** The same stretch after the window changed its height: the top edge stays, the scale stays within its limits. */
export function resize(view: Viewport, height: number): Viewport {
  const wasWhole = view.scale <= fitScale(view.length, view.height) * 1.0001
  return wasWhole ? fit(view.length, height) : clamp({ ...view, height: Math.max(1, height) })
}

/** Shows the stretch [from, to] of the axis with a little air at both ends. */
export function show(view: Viewport, from: number, to: number): Viewport {
  const span = Math.max(1e-9, to - from)
  const room = Math.max(1, view.height - 2 * air)
  const [least, most] = scaleLimits(view)
  const scale = Math.min(most, Math.max(least, room / span))
  return clamp({ ...view, scale, top: (from + to) / 2 - view.height / 2 / scale })
}

/** Puts a position in the middle, the scale unchanged. */
export function centre(view: Viewport, axis: number): Viewport {
  return clamp({ ...view, top: axis - view.height / 2 / view.scale })
}

/**
 * Scrolls no further than needed so that a position lies inside the middle part of the view: at least `context` of the
 * height stays visible on both sides of it. For counting by keyboard: the next boundary comes into sight before it is reached.
 */
export function reveal(view: Viewport, axis: number, context = 0.3): Viewport {
  const y = toScreen(view, axis)
  const edge = Math.min(0.5, Math.max(0, context)) * view.height
  if (y < edge) return pan(view, y - edge)
  if (y > view.height - edge) return pan(view, y - (view.height - edge))
  return view
}

/**
 * Like `reveal`, and magnifies when layers of this thickness (axis pixels) would be too thin to be judged, so that one
 * spans at least `least` CSS pixels. Never zooms out: a closer look is the user's choice.
 */
export function revealLayer(view: Viewport, axis: number, thickness: number, least = 9): Viewport {
  const wanted = thickness > 0 ? least / thickness : 0
  if (!(view.scale < wanted)) return reveal(view, axis)
  const [, most] = scaleLimits(view)
  return centre({ ...view, scale: Math.min(most, wanted * 1.5) }, axis)
}

/** A view between two others, for short transitions: the scale changes evenly to the eye, the middle moves with it. */
export function between(from: Viewport, to: Viewport, share: number): Viewport {
  const t = Math.min(1, Math.max(0, share))
  if (t === 1) return to
  const scale = from.scale * (to.scale / from.scale) ** t
  const start = toAxis(from, from.height / 2)
  const end = toAxis(to, to.height / 2)
  // The middle moves in step with 1/scale, so that the picture grows about one fixed point instead of swinging past it.
  const moved =
    Math.abs(to.scale / from.scale - 1) < 1e-6 ? t : (1 / scale - 1 / from.scale) / (1 / to.scale - 1 / from.scale)
  return { ...to, scale, top: start + (end - start) * moved - to.height / 2 / scale }
}

function fitScale(length: number, height: number): number {
  return Math.max(1, height - 2 * air) / Math.max(1, length)
}
