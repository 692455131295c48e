import type { Frame, Painter, Picture, Surface } from '../surface.ts'
import { acrossToScreen, chooseLevel, coreWindow, tilesIn } from '../tiles.ts'
import type { CoreWindow, Tile } from '../tiles.ts'
import { uprightSize } from '../upright.ts'
import { toScreen } from '../viewport.ts'
import type { Viewport } from '../viewport.ts'
import type { Across, ScanData, TileGrid } from './data.ts'

/** From this magnification on, single pixels are shown as they are instead of being smoothed into each other. */
const pixelsFrom = 3

/** The sediment, from whatever tiles have arrived, the finest last. */
export const paintScan: Painter<ScanData> = (surface, frame, data, theme) => {
  surface.rect(coreFrame(frame, data.viewport, data.across, data.grid), { fill: theme.field })
  paintTiles(surface, frame, data.viewport, data.across, data.grid, data.tile)
}

/** Where the core itself lies in a column, clipped to it. */
export function coreFrame(frame: Frame, view: Viewport, across: Across, grid: TileGrid): Frame {
  const { length, breadth } = uprightSize(grid, grid.orientation)
  const left = Math.max(0, acrossToScreen(across, frame.width, 0))
  const right = Math.min(frame.width, acrossToScreen(across, frame.width, breadth))
  const top = Math.max(0, toScreen(view, 0))
  const bottom = Math.min(frame.height, toScreen(view, length))
  return { x: frame.x + left, y: frame.y + top, width: Math.max(0, right - left), height: Math.max(0, bottom - top) }
}

/**
 * Draws the wanted level; where one of its tiles is missing, the tiles of coarser levels lie under the gap.
 */
export function paintTiles(
  surface: Surface,
  frame: Frame,
  view: Viewport,
  across: Across,
  grid: TileGrid,
  tile: (key: string) => Picture | undefined,
): void {
  const window = coreWindow(view, across, frame.width, grid)
  const level = chooseLevel(grid.levels, Math.max(view.scale, across.scale), surface.pixelRatio)
  const wanted = tilesIn(window, grid, level)
  const found = new Map<string, { tile: Tile; picture: Picture }>()
  const look = (candidate: Tile): boolean => {
    const picture = tile(candidate.key)
    if (picture) found.set(candidate.key, { tile: candidate, picture })
    return picture !== undefined
  }
  for (const missing of wanted.filter((one) => !look(one))) underneath(missing, window, grid, look)
  const smooth = Math.max(view.scale, across.scale) < pixelsFrom
  const coarseFirst = [...found.values()].sort((a, b) => b.tile.level - a.tile.level)
  surface.clip(frame, () => {
    for (const { tile: one, picture } of coarseFirst) {
      const left = acrossToScreen(across, frame.width, one.left)
      const right = acrossToScreen(across, frame.width, one.right)
      const top = toScreen(view, one.from)
      const into = { x: frame.x + left, y: frame.y + top, width: right - left, height: toScreen(view, one.to) - top }
      surface.image(picture, { x: 0, y: 0, width: picture.width, height: picture.height }, into, smooth)
    }
  })
}

/** Looks for coarser tiles under a missing one, from its level upwards, until a level covers it whole. */
function underneath(missing: Tile, window: CoreWindow, grid: TileGrid, look: (tile: Tile) => boolean): void {
  const gap: CoreWindow = {
    from: Math.max(missing.from, window.from),
    to: Math.min(missing.to, window.to),
    left: Math.max(missing.left, window.left),
    right: Math.min(missing.right, window.right),
  }
  for (let level = missing.level + 1; level < grid.levels.length; level++) {
    const coarse = tilesIn(gap, grid, level)
    if (coarse.map(look).every((there) => there) && coarse.length > 0) return
  }
}
