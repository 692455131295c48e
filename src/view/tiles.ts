import type { ScanLevel } from '../../worker/reading/scanFile.ts'
import type { Region } from '../../worker/units.ts'
import type { Across, TileGrid } from './strip/data.ts'
import { toUpright, uprightSize } from './upright.ts'
import { toAxis, visibleRange } from './viewport.ts'
import type { Viewport } from './viewport.ts'

/** Side of a tile, pixels of its level. Tiles lie in the file's own grid, so that a tiled file is read tile by tile. */
export const tileSide = 512

/** One tile: which part of the file it shows and where that part lies on the upright core. */
export interface Tile {
  /** Names scan, display, turn, level and place; the key of the cache. */
  key: string
  level: number
  /** Pixels of the level, to be asked of the worker. */
  region: Region
  /** Stretch of the core it covers, axis pixels. */
  from: number
  to: number
  /** Part of the breadth it covers, across pixels. */
  left: number
  right: number
}

/** A window of the upright core: axis and across pixels. */
export interface CoreWindow {
  from: number
  to: number
  left: number
  right: number
}

/** The core at its true proportions, as much of its breadth as fits, centred on `centre` (for example the transect). */
export function trueAcross(view: Viewport, breadth: number, width: number, centre: number): Across {
  return heldInside({ centre, scale: view.scale }, breadth, width)
}

/** Like `trueAcross`, but the breadth is squeezed where a transect's band would not fit into the column with its marks beside it. */
export function bandAcross(
  view: Viewport,
  breadth: number,
  width: number,
  band: { centre: number; width: number },
): Across {
  const marks = 32
  const scale = Math.min(view.scale, Math.max(1, width - marks) / Math.max(1, band.width))
  return heldInside({ centre: band.centre, scale }, breadth, width)
}

/** The whole breadth squeezed or stretched into the column. */
export function wholeAcross(breadth: number, width: number): Across {
  return { centre: breadth / 2, scale: width / Math.max(1, breadth) }
}

/** Keeps the column filled where the core is broad enough, and the core in its middle where it is not. */
function heldInside(across: Across, breadth: number, width: number): Across {
  const half = width / 2 / across.scale
  const centre = 2 * half >= breadth ? breadth / 2 : Math.min(breadth - half, Math.max(half, across.centre))
  return { centre, scale: across.scale }
}

/** Across position of a column's x (CSS pixels from its left edge), and back. */
export function toAcross(across: Across, width: number, x: number): number {
  return across.centre + (x - width / 2) / across.scale
}
export function acrossToScreen(across: Across, width: number, position: number): number {
  return (position - across.centre) * across.scale + width / 2
}

/** The window a column of the given width shows, clipped to the core. */
export function coreWindow(view: Viewport, across: Across, width: number, grid: TileGrid): CoreWindow {
  const { length, breadth } = uprightSize(grid, grid.orientation)
  const [from, to] = visibleRange(view)
  return {
    from: Math.max(0, from),
    to: Math.min(length, to),
    left: Math.max(0, toAcross(across, width, 0)),
    right: Math.min(breadth, toAcross(across, width, width)),
  }
}

/**
 * The coarsest level that still gives about one of its pixels for each device pixel. A quarter too few is allowed: a level
 * of four times as many pixels would take four times as long and look the same.
 */
export function chooseLevel(levels: readonly ScanLevel[], cssPerPixel: number, devicePixelRatio: number): number {
  const most = 1.25 / (cssPerPixel * devicePixelRatio)
  let chosen = 0
  for (let k = 1; k < levels.length; k++) {
    if (levels[k].shrink <= most && levels[k].shrink > levels[chosen].shrink) chosen = k
  }
  return chosen
}

/** Tiles that the column needs, those nearest to its middle first. Widths in CSS pixels. */
export function tilesNeeded(
  view: Viewport,
  across: Across,
  width: number,
  grid: TileGrid,
  devicePixelRatio: number,
): Tile[] {
  const level = chooseLevel(grid.levels, Math.max(view.scale, across.scale), devicePixelRatio)
  const tiles = tilesIn(coreWindow(view, across, width, grid), grid, level)
  const middle = toAxis(view, view.height / 2)
  const distance = (tile: Tile) => Math.abs((tile.from + tile.to) / 2 - middle)
  return tiles.sort((a, b) => distance(a) - distance(b))
}

/** All tiles of a level that meet a window, in the file's order. */
export function tilesIn(window: CoreWindow, grid: TileGrid, level: number): Tile[] {
  if (!(window.from < window.to && window.left < window.right)) return []
  const { width, height } = grid.levels[level]
  const file = fileRegion(window, grid)
  // A level's width need not be an exact fraction of the scan's, so each direction has its own ratio.
  const xRatio = grid.width / width
  const yRatio = grid.height / height
  const tiles: Tile[] = []
  const lastColumn = Math.min(Math.ceil(width / tileSide), Math.ceil((file.x + file.width) / xRatio / tileSide)) - 1
  const lastRow = Math.min(Math.ceil(height / tileSide), Math.ceil((file.y + file.height) / yRatio / tileSide)) - 1
  for (let row = Math.floor(file.y / yRatio / tileSide); row <= lastRow; row++) {
    for (let column = Math.floor(file.x / xRatio / tileSide); column <= lastColumn; column++) {
      const x = column * tileSide
      const y = row * tileSide
      const region = { x, y, width: Math.min(tileSide, width - x), height: Math.min(tileSide, height - y) }
      tiles.push(placed(region, grid, level, xRatio, yRatio, `${column}/${row}`))
    }
  }
  return tiles
}

function placed(region: Region, grid: TileGrid, level: number, xRatio: number, yRatio: number, place: string): Tile {
  const { orientation } = grid
  const a = toUpright({ x: region.x * xRatio, y: region.y * yRatio }, grid, orientation)
  const b = toUpright(
    { x: (region.x + region.width) * xRatio, y: (region.y + region.height) * yRatio },
    grid,
    orientation,
  )
  return {
    key: `${grid.scan}/${orientation.axis}${orientation.young}/${level}/${place}`,
    level,
    region,
    from: Math.min(a.axis, b.axis),
    to: Math.max(a.axis, b.axis),
    left: Math.min(a.across, b.across),
    right: Math.max(a.across, b.across),
  }
}

/** A window of the upright core in the file's pixels. */
function fileRegion(window: CoreWindow, grid: TileGrid): Region {
  const low = grid.orientation.young === 'low'
  const alongY = grid.orientation.axis === 'y'
  const axis = low
    ? [window.from, window.to]
    : [-window.to, -window.from].map((v) => v + (alongY ? grid.height : grid.width))
  // Across runs with the file for (y, low) and (x, high), against it for the other two turns.
  const straight = alongY === low
  const across = straight
    ? [window.left, window.right]
    : [-window.right, -window.left].map((v) => v + (alongY ? grid.width : grid.height))
  const [x, y] = alongY ? [across, axis] : [axis, across]
  return { x: x[0], y: y[0], width: x[1] - x[0], height: y[1] - y[0] }
}
