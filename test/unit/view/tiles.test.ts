import { describe, expect, it } from 'vitest'
import type { TileGrid } from '../../../src/view/strip/data.ts'
import { paintScan } from '../../../src/view/strip/scan.ts'
import type { Picture } from '../../../src/view/surface.ts'
import { lightTheme } from '../../../src/view/theme.ts'
import { TileCache } from '../../../src/view/tileCache.ts'
import {
  acrossToScreen,
  bandAcross,
  chooseLevel,
  coreWindow,
  tilesIn,
  tilesNeeded,
  tileSide,
  toAcross,
  trueAcross,
  wholeAcross,
} from '../../../src/view/tiles.ts'
import { toScan, toUpright, uprightSize } from '../../../src/view/upright.ts'
import { fit, show, zoomAt } from '../../../src/view/viewport.ts'
import { samplesOf, uprightView } from '../../../worker/core/scan.ts'
import type { Orientation } from '../../../worker/core/scan.ts'
import { RecordingSurface } from './recordingSurface.ts'

const orientations: Orientation[] = [
  { axis: 'x', young: 'low' },
  { axis: 'x', young: 'high' },
  { axis: 'y', young: 'low' },
  { axis: 'y', young: 'high' },
]
const name = ({ axis, young }: Orientation) => `axis ${axis}, young end ${young}`

function gridOf(orientation: Orientation, long = 9001, short = 1203): TileGrid {
  const [width, height] = orientation.axis === 'x' ? [long, short] : [short, long]
  const levels = [1, 2, 4, 8].map((shrink) => ({
    width: Math.ceil(width / shrink),
    height: Math.ceil(height / shrink),
    shrink,
  }))
  return { scan: 'abc', width, height, levels, orientation }
}

describe.each(orientations.map((orientation) => [name(orientation), orientation] as const))(
  'with %s',
  (_, orientation) => {
    it('the upright core is the one that the profile is read from', () => {
      const [width, height] = [5, 3]
      const data = Uint8Array.from({ length: width * height }, (_unused, i) => i)
      const upright = uprightView(samplesOf(data, width, height, 1), orientation)
      for (let y = 0; y < height; y++) {
        for (let x = 0; x < width; x++) {
          const { axis, across } = toUpright({ x: x + 0.5, y: y + 0.5 }, { width, height }, orientation)
          expect(upright.get(axis - 0.5, across - 0.5, 0)).toBe(y * width + x)
        }
      }
    })

    it('points come back where they were', () => {
      const size = { width: 900, height: 70 }
      const there = toUpright({ x: 12.5, y: 33 }, size, orientation)
      expect(toScan(there, size, orientation)).toEqual({ x: 12.5, y: 33 })
    })

    it('the tiles of each level cover the window once and lie inside the level', () => {
      const grid = gridOf(orientation)
      const window = { from: 700.3, to: 4100.7, left: 200.2, right: 1100.9 }
      for (let level = 0; level < grid.levels.length; level++) {
        const tiles = tilesIn(window, grid, level)
        expect(new Set(tiles.map((tile) => tile.key)).size).toBe(tiles.length)
        for (const { region } of tiles) {
          expect(region.width > 0 && region.height > 0 && region.width <= tileSide && region.height <= tileSide).toBe(
            true,
          )
          expect(region.x + region.width).toBeLessThanOrEqual(grid.levels[level].width)
          expect(region.y + region.height).toBeLessThanOrEqual(grid.levels[level].height)
        }
        for (let axis = window.from; axis < window.to; axis += 97.3) {
          for (let across = window.left; across < window.right; across += 61.7) {
            const over = tiles.filter((t) => axis >= t.from && axis < t.to && across >= t.left && across < t.right)
            expect(over.length).toBe(1)
          }
        }
      }
    })

    it('no tile is asked for that the window does not touch', () => {
      const grid = gridOf(orientation)
      const window = { from: 512, to: 1024, left: 10, right: 20 }
      for (const tile of tilesIn(window, grid, 0)) {
        expect(
          tile.from < window.to && tile.to > window.from && tile.left < window.right && tile.right > window.left,
        ).toBe(true)
      }
    })
  },
)

const grid = gridOf(orientations[0])
const { length, breadth } = uprightSize(grid, grid.orientation)

describe('the choice of a level', () => {
  it('is the coarsest that still has about one pixel for each device pixel', () => {
    expect(chooseLevel(grid.levels, 1, 1)).toBe(0)
    expect(chooseLevel(grid.levels, 0.5, 1)).toBe(1)
    expect(chooseLevel(grid.levels, 0.5, 2)).toBe(0)
    expect(chooseLevel(grid.levels, 0.3, 1)).toBe(2)
    expect(chooseLevel(grid.levels, 0.001, 1)).toBe(3)
    expect(chooseLevel(grid.levels.slice(0, 1), 0.001, 1)).toBe(0)
  })
})

describe('the column of the scan', () => {
  it('keeps true proportions, centred on the transect as far as the core reaches', () => {
    const view = zoomAt(fit(length, 800), 400, 20)
    const across = trueAcross(view, breadth, 200, 20)
    expect(across.scale).toBe(view.scale)
    expect(toAcross(across, 200, 0)).toBeCloseTo(0, 6)
    const middle = trueAcross(view, breadth, 200, 600)
    expect(acrossToScreen(middle, 200, 600)).toBeCloseTo(100, 6)
  })
  it('puts a core narrower than the column in its middle', () => {
    expect(trueAcross(fit(length, 800), breadth, 400, 20).centre).toBe(breadth / 2)
  })
  it('squeezes the breadth only as far as the band needs', () => {
    const view = zoomAt(fit(length, 800), 400, 1e9)
    const across = bandAcross(view, breadth, 232, { centre: 600, width: 400 })
    expect(across.scale).toBeCloseTo(0.5, 9)
    expect(bandAcross(view, breadth, 232, { centre: 600, width: 4 }).scale).toBe(view.scale)
  })
  it('asks for the tiles around its middle first', () => {
    const view = show(fit(length, 800), 2000, 7000)
    const tiles = tilesNeeded(view, wholeAcross(breadth, 200), 200, grid, 1)
    const far = tiles.map((tile) => Math.abs((tile.from + tile.to) / 2 - 4500))
    expect(far).toEqual([...far].sort((a, b) => a - b))
    expect(tiles.length).toBeGreaterThan(2)
  })
  it('asks for nothing where the core is not in view', () => {
    const window = coreWindow({ length, height: 100, top: length + 50, scale: 1 }, wholeAcross(breadth, 200), 200, grid)
    expect(tilesIn(window, grid, 0)).toEqual([])
  })
})

describe('drawing what has arrived', () => {
  const view = show(fit(length, 700), 1000, 3000)
  const across = wholeAcross(breadth, 400)
  const picture: Picture = { width: 512, height: 512 }
  const draw = (there: (key: string) => boolean) => {
    const surface = new RecordingSurface()
    const tile = (key: string) => (there(key) ? { ...picture, href: key } : undefined)
    paintScan(surface, { x: 0, y: 0, width: 400, height: 700 }, { viewport: view, across, grid, tile }, lightTheme)
    return surface.images.map((image) => image.picture.href ?? '')
  }
  const levelOf = (key: string) => Number(key.split('/')[2])

  it('draws the wanted level and nothing under it once all its tiles are there', () => {
    const level = chooseLevel(grid.levels, Math.max(view.scale, across.scale), 1)
    const drawn = draw(() => true)
    expect(new Set(drawn.map(levelOf))).toEqual(new Set([level]))
    expect(drawn.sort()).toEqual(
      tilesNeeded(view, across, 400, grid, 1)
        .map((tile) => tile.key)
        .sort(),
    )
  })

  it('lays a coarser tile under a gap, before the finer ones', () => {
    const wanted = tilesNeeded(view, across, 400, grid, 1)
    const missing = wanted[0].key
    const drawn = draw((key) => key !== missing)
    expect(drawn).not.toContain(missing)
    expect(levelOf(drawn[0])).toBe(wanted[0].level + 1)
    expect(drawn.slice(-wanted.length + 1).every((key) => levelOf(key) === wanted[0].level)).toBe(true)
  })

  it('goes on to still coarser levels until one is there', () => {
    expect(new Set(draw((key) => levelOf(key) === 3).map(levelOf))).toEqual(new Set([3]))
    expect(draw(() => false)).toEqual([])
  })
})

describe('the cache of tiles', () => {
  const tile: Picture = { width: 16, height: 16 }
  const bytes = 16 * 16 * 4

  it('lets the tile go that was not looked at for longest', () => {
    const released: Picture[] = []
    const cache = new TileCache(3 * bytes, (picture) => released.push(picture))
    const pictures = ['a', 'b', 'c', 'd'].map((href) => ({ ...tile, href }))
    pictures.slice(0, 3).forEach((picture) => cache.set(picture.href, picture))
    expect(cache.get('a')).toBe(pictures[0])
    cache.set('d', pictures[3])
    expect(['a', 'b', 'c', 'd'].map((key) => cache.has(key))).toEqual([true, false, true, true])
    expect(released).toEqual([pictures[1]])
    expect(cache.bytes).toBe(3 * bytes)
  })

  it('keeps what it was told to keep', () => {
    const cache = new TileCache(2 * bytes)
    cache.set('coarse', tile, true)
    for (let i = 0; i < 5; i++) cache.set(`fine ${i}`, tile)
    expect(cache.has('coarse')).toBe(true)
    expect(cache.size).toBe(2)
  })

  it('holds the newest tile even where it alone exceeds the budget', () => {
    const cache = new TileCache(bytes / 2)
    cache.set('a', tile)
    cache.set('b', tile)
    expect([cache.has('a'), cache.has('b')]).toEqual([false, true])
  })

  it('releases a tile that is replaced, and all tiles of a scan that is closed', () => {
    const released: string[] = []
    const cache = new TileCache(100 * bytes, (picture) => released.push(picture.href ?? ''))
    cache.set('x/1', { ...tile, href: 'old' })
    cache.set('x/1', { ...tile, href: 'new' })
    cache.set('y/1', { ...tile, href: 'other' })
    cache.clear('x/')
    expect(released).toEqual(['old', 'new'])
    expect(cache.bytes).toBe(bytes)
  })
})
