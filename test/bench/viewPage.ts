import { prepareCanvas } from '../../src/view/canvasSurface.ts'
import { buildPyramid } from '../../src/view/minMaxPyramid.ts'
import { pathAxis } from '../../src/view/pathAxis.ts'
import { paintCompare } from '../../src/view/strip/compare.ts'
import { paintConfidence } from '../../src/view/strip/confidence.ts'
import { paintDepthAxis } from '../../src/view/strip/depthAxis.ts'
import { paintLadder } from '../../src/view/strip/ladder.ts'
import { paintProfile } from '../../src/view/strip/profile.ts'
import { paintScan } from '../../src/view/strip/scan.ts'
import { paintScanMarks } from '../../src/view/strip/scanMarks.ts'
import { paintTransect } from '../../src/view/strip/transect.ts'
import type { Frame, Picture, Surface } from '../../src/view/surface.ts'
import { lightTheme } from '../../src/view/theme.ts'
import { tilesNeeded, trueAcross } from '../../src/view/tiles.ts'
import { fit, show } from '../../src/view/viewport.ts'
import type { Viewport } from '../../src/view/viewport.ts'
import { seededRandom } from '../../worker/random.ts'

/*
 * The page of the view's bench: a core of 150,000 px with 20,000 boundaries, all columns beside each other, drawn on request.
 */

const length = 150_000
const breadth = 3000
const boundaries = 20_000
const height = 900
const theme = lightTheme
const random = seededRandom(1)

const position = Float64Array.from(
  { length: boundaries },
  (_, i) => ((i + 0.5 * random.uniform()) * length) / boundaries,
)
const mark = Uint8Array.from({ length: boundaries }, () => (random.uniform() < 0.05 ? 1 : 0))
const column = { position, mark }
const years = Float64Array.from(position, (_, i) => i + 1)
const probability = Float64Array.from(position, () => 1 - random.uniform() ** 4)
const label = Uint8Array.from({ length: 3 * boundaries }, () =>
  random.uniform() < 0.02 ? 0 : random.uniform() < 0.05 ? 1 : 2,
)
const own = Float64Array.from({ length: 3 * boundaries }, (_, i) =>
  label[i] === 0 ? NaN : position[Math.floor(i / 3)],
)
const counters = ['A', 'B', 'C'].map((name) => ({ name, column }))
const pyramid = buildPyramid(Float64Array.from({ length }, () => 100 + 30 * random.normal()))
const transect = {
  points: [
    { axis: 0, across: 1500 },
    { axis: length, across: 1500 },
  ],
  width: 200,
}
const path = pathAxis(transect.points)
const levels = [1, 2, 4, 8, 16, 32, 64].map((shrink) => ({ width: breadth / shrink, height: length / shrink, shrink }))
const grid = {
  scan: 'bench',
  width: breadth,
  height: length,
  levels,
  orientation: { axis: 'y', young: 'low' },
} as const

const bitmap = new OffscreenCanvas(512, 512)
const brush = bitmap.getContext('2d')
for (let y = 0; brush && y < 512; y++) {
  brush.fillStyle = `hsl(35 20% ${20 + 40 * random.uniform()}%)`
  brush.fillRect(0, y, 512, 1)
}
const tiles = new Map<string, Picture>()

const widths = { depth: 58, scan: 300, profile: 120, ladder: 120, compare: 150, confidence: 64 }
type Column = keyof typeof widths
const surfaces = new Map<Column, Surface>()
const canvases = new Map<Column, HTMLCanvasElement>()
for (const name of Object.keys(widths) as Column[]) {
  const canvas = document.createElement('canvas')
  canvas.style.cssText = `width:${widths[name]}px;height:${height}px`
  document.body.append(canvas)
  canvases.set(name, canvas)
}

function paint(name: Column, surface: Surface, frame: Frame, viewport: Viewport): void {
  const cursor = position[10_000]
  const shared = { viewport, spans: [], cursor }
  const across = trueAcross(viewport, breadth, widths.scan, 1500)
  const draw: Record<Column, () => void> = {
    depth: () => paintDepthAxis(surface, frame, { viewport, mmPerPx: 0.02, depthTop: 0 }, theme),
    scan: () => {
      // Every tile is there, as after loading: what is measured is the drawing.
      const tile = (key: string) => tiles.get(key)
      for (const { key } of tilesNeeded(viewport, across, widths.scan, grid, devicePixelRatio)) {
        if (!tiles.has(key)) tiles.set(key, { width: 512, height: 512, source: bitmap })
      }
      paintScan(surface, frame, { viewport, across, grid, tile }, theme)
      paintTransect(surface, frame, { viewport, across, transect, editable: false, active: null }, theme)
      paintScanMarks(surface, frame, { ...shared, across, transect, boundaries: column, proposals: null }, theme)
    },
    profile: () =>
      paintProfile(
        surface,
        frame,
        { ...shared, path, lines: [{ pyramid, domain: [0, 200], tone: 'ink' }], boundaries: column },
        theme,
      ),
    ladder: () =>
      paintLadder(
        surface,
        frame,
        {
          ...shared,
          boundaries: column,
          proposals: null,
          years,
          selected: null,
          selectedSpan: null,
          checkedTo: cursor,
        },
        theme,
      ),
    compare: () => paintCompare(surface, frame, { viewport, counters, sites: { position, own, label }, cursor }, theme),
    confidence: () => paintConfidence(surface, frame, { viewport, position, probability, cursor }, theme),
  }
  draw[name]()
}

/** All columns once, or one of them. */
function frame(viewport: Viewport, only?: string): void {
  for (const [name, canvas] of canvases) {
    if (only !== undefined && only !== name) continue
    const surface = prepareCanvas(canvas, widths[name], height, devicePixelRatio, theme.font)
    if (!surface) throw new Error('no 2D canvas')
    surfaces.set(name, surface)
    paint(name, surface, { x: 0, y: 0, width: widths[name], height }, viewport)
  }
}

/** What a plain loop over all boundaries would cost: every one of them a line, wherever it lies. */
function plainLoop(viewport: Viewport): void {
  const canvas = canvases.get('ladder')
  const surface = canvas && prepareCanvas(canvas, widths.ladder, height, devicePixelRatio, theme.font)
  const lines: number[] = []
  for (const axis of position) {
    const y = (axis - viewport.top) * viewport.scale
    lines.push(2, y, 44, y)
  }
  surface?.lines(lines, { colour: theme.ink, width: 1 })
}

const whole = fit(length, height)
const views: Record<string, (k: number) => Viewport> = {
  'whole core': (k) => show(whole, 0, length - (k % 2)),
  'a tenth': (k) => show(whole, 60_000 + k * 40, 75_000 + k * 40),
  counting: (k) => show(whole, 75_000 + k * 3, 75_500 + k * 3),
}

/** Milliseconds of script for each of `count` frames that move, in a view: 'all' columns, one of them, or the 'plain loop'. */
function script(view: string, what: string, count: number): number[] {
  return Array.from({ length: count }, (_, k) => {
    const start = performance.now()
    if (what === 'plain loop') plainLoop(views[view](k))
    else frame(views[view](k), what === 'all' ? undefined : what)
    return performance.now() - start
  })
}

/** Milliseconds from one frame on screen to the next while the view moves. */
async function onScreen(view: string, count: number): Promise<number[]> {
  const gaps: number[] = []
  let last = await new Promise<number>(requestAnimationFrame)
  for (let k = 0; k < count; k++) {
    frame(views[view](k))
    const now = await new Promise<number>(requestAnimationFrame)
    gaps.push(now - last)
    last = now
  }
  return gaps
}

Object.assign(globalThis, { script, onScreen, viewNames: Object.keys(views), columnNames: Object.keys(widths) })
