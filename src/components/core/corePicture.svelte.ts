import { marks } from '../../document/layerSet.ts'
import type { LayerSet } from '../../document/layerSet.ts'
import type { Session } from '../../session/session.svelte.ts'
import { buildPyramid } from '../../view/minMaxPyramid.ts'
import { formatNumber } from '../../view/numbers.ts'
import { axisToPath, columnToAxis, pathAxis, pathToAxis } from '../../view/pathAxis.ts'
import type { PathAxis } from '../../view/pathAxis.ts'
import type { Across, MarkColumn, ProposalColumn, StripSpan, TileGrid, UprightTransect } from '../../view/strip/data.ts'
import { paintAgeError, paintConfidence } from '../../view/strip/confidence.ts'
import { paintCompare } from '../../view/strip/compare.ts'
import { paintDepthAxis } from '../../view/strip/depthAxis.ts'
import { paintLadder } from '../../view/strip/ladder.ts'
import { overviewViewport, paintOverview } from '../../view/strip/overview.ts'
import { paintProfile } from '../../view/strip/profile.ts'
import { paintScan } from '../../view/strip/scan.ts'
import { paintScanMarks } from '../../view/strip/scanMarks.ts'
import { paintTransect } from '../../view/strip/transect.ts'
import type { Surface } from '../../view/surface.ts'
import type { Theme } from '../../view/theme.ts'
import { tilesNeeded, trueAcross, wholeAcross } from '../../view/tiles.ts'
import { uprightSize, uprightTransect } from '../../view/upright.ts'
import { pathAcrossAt } from '../../view/transectShape.ts'
import { toAxis } from '../../view/viewport.ts'
import type { Columns } from './columns.ts'
import type { CoreState } from './coreState.svelte.ts'
import type { TileLoader } from './tileLoader.svelte.ts'

const rejected = marks.indexOf('rejected')

/** What is drawn of the core: the session's data turned into the columns that the painters take. */
export class CorePicture {
  #session: Session
  #core: CoreState
  #loader: TileLoader

  constructor(session: Session, core: CoreState, loader: TileLoader) {
    this.#session = session
    this.#core = core
    this.#loader = loader
    core.toPath = (axis) => this.axisToPath(axis)
  }

  /** Size of the upright core, and which scan it is. */
  size = $derived.by(() => {
    const section = this.#session.section
    return section
      ? { scan: `${section.id}/${section.orientation.young}`, ...uprightSize(section.scan, section.orientation) }
      : null
  })
  grid: TileGrid | null = $derived.by(() => {
    const { section, scan } = this.#session
    if (!section || !scan) return null
    const { width, height, levels } = scan.info
    return { scan: scan.info.sha256, width, height, levels, orientation: section.orientation }
  })
  upright: UprightTransect | null = $derived.by(() => {
    const { section, transect } = this.#session
    if (this.#core.draft) return this.#core.draft
    return section && transect ? uprightTransect(transect, section.scan, section.orientation) : null
  })
  path: PathAxis = $derived.by(() => {
    const { section, transect } = this.#session
    return pathAxis(section && transect ? uprightTransect(transect, section.scan, section.orientation).points : [])
  })
  boundaries: MarkColumn | null = $derived.by(() => {
    const { layers } = this.#session.counting
    const column = this.column(layers)
    const { dragged } = this.#core
    if (!dragged) return column
    const index = layers.id.indexOf(dragged.id)
    if (index >= 0) column.position[index] = dragged.axis
    return column
  })
  proposals: ProposalColumn = $derived.by(() => {
    const { position, probability, chosen } = this.#session.counting.proposals
    return { position: columnToAxis(this.path, position), probability, chosen }
  })
  spans: StripSpan[] = $derived.by(() => {
    const { spans, counting } = this.#session
    const shown: StripSpan[] = spans.map(({ from, to, kind }) => ({
      from: pathToAxis(this.path, from),
      to: pathToAxis(this.path, to),
      kind,
    }))
    const { pendingSpan, cursor } = counting
    if (pendingSpan && cursor !== null) {
      const ends = [pendingSpan.from, cursor].map((end) => pathToAxis(this.path, end)).sort((a, b) => a - b)
      shown.push({ from: ends[0], to: ends[1], kind: pendingSpan.kind })
    }
    return shown
  })
  cursorAxis = $derived.by(() => {
    const { cursor } = this.#session.counting
    return cursor === null || this.#session.step === 'scan' ? null : pathToAxis(this.path, cursor)
  })
  /** Varve number of each boundary that counts, from the top; NaN for rejected ones. */
  years = $derived.by(() => {
    const { mark } = this.#session.counting.layers
    let year = 0
    return Float64Array.from(mark, (one) => (one === rejected ? NaN : ++year))
  })
  selected = $derived.by(() => {
    const { selection, layers } = this.#session.counting
    if (!selection) return null
    return Uint8Array.from(layers.position, (at) => (at >= selection[0] - 0.5 && at <= selection[1] + 0.5 ? 1 : 0))
  })
  /** Modelled thickness where the cursor stands, scan pixels; null while there is no ladder. */
  localThickness = $derived.by(() => {
    const ladder = this.#session.detection.found?.ladder
    const { cursor } = this.#session.counting
    if (!ladder || ladder.position.length === 0 || cursor === null) return null
    let k = 0
    while (k < ladder.position.length - 1 && ladder.position[k] < cursor) k++
    return ladder.thickness[k]
  })
  #signal = $derived.by(() => {
    const { found } = this.#session.detection
    return found ? buildPyramid(found.detrended.signal) : null
  })
  /** Slope of the beds across the upright core: the tangent of their tilt, read from the profile. */
  #slopeAt = $derived.by(() => {
    const { profile } = this.#session.detection
    if (!profile || profile.tilt.length === 0) return undefined
    const { path } = this
    return (axis: number) =>
      Math.tan(profile.tilt[Math.min(profile.tilt.length - 1, Math.max(0, Math.floor(axisToPath(path, axis))))])
  })
  #ladderAxis = $derived.by(() => {
    const ladder = this.#session.detection.found?.ladder
    return ladder ? { position: columnToAxis(this.path, ladder.position), probability: ladder.probability } : null
  })
  /** Aligned sites of the comparison, on the axis; null while the columns are not those it was made from. */
  #sites = $derived.by(() => {
    const { result } = this.#session.comparison
    if (!result || result.totals.length !== this.#session.compared.length) return null
    const { position, label } = result.alignment
    return { position: columnToAxis(this.path, position), own: columnToAxis(this.path, result.own), label }
  })
  /** What the last column shows, with its scale: the greatest half width reaches the column's edge. */
  sideName = $derived.by(() => {
    const { step, chronology } = this.#session
    if (step === 'compare') return 'Counts'
    if (step !== 'date' && step !== 'rates') return 'Probability'
    const widest = chronology.result ? chronology.result.half95.reduce((most, one) => Math.max(most, one), 0) : 0
    return widest > 0 ? `95 %, ± ${formatNumber(widest, widest < 10 ? 1 : 0)} a` : '95 %'
  })
  description = $derived.by(() => {
    const { section, count, counting } = this.#session
    if (!section) return 'No scan yet'
    const years = count ? `${this.boundaries?.position.length ?? 0} boundaries marked` : 'no count yet'
    const at = counting.cursor === null ? '' : `; cursor at ${counting.cursor.toFixed(1)} pixels`
    return `Core section ${section.name}, young side up, ${years}${at}`
  })

  /** A count's boundaries on the axis. */
  column(layers: LayerSet): MarkColumn {
    return { position: columnToAxis(this.path, layers.position), mark: layers.mark }
  }

  axisToPath(axis: number): number {
    return axisToPath(this.path, axis)
  }

  across(width: number): Across {
    const { viewport } = this.#core
    const breadth = this.size?.breadth ?? 1
    // From afar a core is a thread: its breadth is drawn out until, closer in, true proportions are broader than that.
    const least = Math.min(width, 220)
    if (breadth * viewport.scale < least) return wholeAcross(breadth, least)
    const middle = toAxis(viewport, viewport.height / 2)
    const centre = this.upright ? pathAcrossAt(this.upright, middle) : breadth / 2
    return trueAcross(viewport, breadth, width, Math.min(breadth, Math.max(0, centre + this.#core.shift)))
  }

  requestTiles(columns: Columns): void {
    const { grid } = this
    const display = this.#session.scan?.display
    if (!grid || !display) return
    const { width } = columns.frames.scan
    const ratio = window.devicePixelRatio || 1
    const { viewport } = this.#core
    const overview = overviewViewport({ ...viewport, height: columns.frames.overview.height })
    const breadth = this.size?.breadth ?? 1
    this.#loader.want(
      grid,
      display,
      tilesNeeded(viewport, this.across(width), width, grid, ratio),
      tilesNeeded(
        overview,
        wholeAcross(breadth, columns.frames.overview.width),
        columns.frames.overview.width,
        grid,
        ratio,
      ),
    )
  }

  /** Reads everything that is to be drawn now and returns the drawing, so that an effect follows each part. */
  painter(columns: Columns, theme: Theme): (surface: Surface) => void {
    const { viewport } = this.#core
    const session = this.#session
    const parts = [
      this.#overviewPart(columns, theme),
      this.#axisPart(columns, theme),
      this.#scanPart(columns, theme),
      this.#profilePart(columns, theme),
      this.#ladderPart(columns, theme),
      this.#sidePart(columns, theme),
    ]
    const empty = !session.section
    // The count of tiles that have arrived is read here so that the picture is drawn again with them.
    const tiles = this.#loader.arrived
    return (surface) => {
      if (empty || tiles < 0 || viewport.height <= 1) return
      for (const part of parts) part(surface)
    }
  }

  #overviewPart({ frames }: Columns, theme: Theme) {
    const { viewport } = this.#core
    const { count } = this.#session
    const checked = count && count.checkedTo > 0 ? [{ from: 0, to: pathToAxis(this.path, count.checkedTo) }] : []
    const data = {
      viewport,
      grid: this.grid,
      tile: this.#loader.get,
      checked,
      spans: this.spans,
      boundaries: this.boundaries,
      cursor: this.cursorAxis,
    }
    return (surface: Surface) => paintOverview(surface, frames.overview, data, theme)
  }

  #axisPart({ frames }: Columns, theme: Theme) {
    const { section } = this.#session
    const data = {
      viewport: this.#core.viewport,
      mmPerPx: section?.scale?.mmPerPx ?? null,
      depthTop: section?.depthTop ?? 0,
      pointer: this.#core.pointer?.axis ?? null,
    }
    return (surface: Surface) => paintDepthAxis(surface, frames.axis, data, theme)
  }

  #scanPart({ frames }: Columns, theme: Theme) {
    const { viewport, tool, handle, ruler } = this.#core
    const { step } = this.#session
    const across = this.across(frames.scan.width)
    const { grid, upright, boundaries, proposals, spans, cursorAxis } = this
    const counting = step !== 'scan'
    const slopeAt = this.#slopeAt
    return (surface: Surface) => {
      if (grid) paintScan(surface, frames.scan, { viewport, across, grid, tile: this.#loader.get }, theme)
      if (!upright) return
      if (counting) {
        const transect = upright
        paintScanMarks(
          surface,
          frames.scan,
          { viewport, across, transect, boundaries, proposals, spans, cursor: cursorAxis, ...(slopeAt && { slopeAt }) },
          theme,
        )
      } else {
        const editable = tool === 'transect'
        paintTransect(surface, frames.scan, { viewport, across, transect: upright, editable, active: handle }, theme)
      }
      this.#paintRuler(surface, frames.scan, across, ruler, theme)
    }
  }

  #paintRuler(
    surface: Surface,
    frame: { x: number; y: number; width: number; height: number },
    across: Across,
    ruler: CoreState['ruler'],
    theme: Theme,
  ) {
    const { viewport } = this.#core
    const place = ruler.map((point) => ({
      x: frame.x + (point.across - across.centre) * across.scale + frame.width / 2,
      y: frame.y + (point.axis - viewport.top) * viewport.scale,
    }))
    surface.clip(frame, () => {
      for (const { x, y } of place) {
        for (const [colour, width] of [
          [theme.overScan.casing, 3],
          [theme.overScan.accent, 1],
        ] as const) {
          surface.line(x - 14, y, x + 14, y, { colour, width })
          surface.line(x, y - 6, x, y + 6, { colour, width })
        }
      }
      if (place.length === 2) {
        surface.line(place[0].x, place[0].y, place[1].x, place[1].y, { colour: theme.overScan.accent, width: 1.5 })
      }
    })
  }

  #profilePart({ frames }: Columns, theme: Theme) {
    const signal = this.#signal
    const { viewport } = this.#core
    const { path, spans, boundaries, cursorAxis } = this
    const stale = !this.#session.detection.current
    return (surface: Surface) => {
      if (!signal) return
      const data = {
        viewport,
        path,
        lines: [{ pyramid: signal, domain: [-3.5, 3.5] as const, tone: stale ? ('quiet' as const) : ('ink' as const) }],
        spans,
        boundaries,
        cursor: cursorAxis,
      }
      paintProfile(surface, frames.profile, data, theme)
    }
  }

  #ladderPart({ frames }: Columns, theme: Theme) {
    const { count } = this.#session
    const data = {
      viewport: this.#core.viewport,
      boundaries: this.boundaries,
      proposals: this.proposals,
      spans: this.spans,
      years: this.years,
      cursor: this.cursorAxis,
      selected: this.selected,
      selectedSpan: null,
      checkedTo: count && count.checkedTo > 0 ? pathToAxis(this.path, count.checkedTo) : null,
    }
    return (surface: Surface) => paintLadder(surface, frames.ladder, data, theme)
  }

  #sidePart({ frames }: Columns, theme: Theme): (surface: Surface) => void {
    const { viewport } = this.#core
    const { step } = this.#session
    if (step === 'compare') {
      const counters = this.#session.compared.map(({ name, count }) => ({ name, column: this.column(count.layers) }))
      const data = { viewport, counters, sites: this.#sites, cursor: this.cursorAxis }
      return (surface) => paintCompare(surface, frames.side, data, theme)
    }
    if (step === 'date' || step === 'rates') {
      const data = this.ageError()
      return (surface) => {
        if (data) paintAgeError(surface, frames.side, { viewport, ...data, limit: null }, theme)
      }
    }
    const ladder = this.#session.counting.proposalsHidden ? null : this.#ladderAxis
    const data = ladder && { viewport, ...ladder, cursor: this.cursorAxis }
    return (surface) => {
      if (data) paintConfidence(surface, frames.side, data, theme)
    }
  }

  /** The chronology's error on the axis, half widths of its 95 % interval; null while there is none. */
  ageError(): { position: Float64Array; younger: Float64Array; older: Float64Array } | null {
    const { result } = this.#session.chronology
    if (!result) return null
    return { position: columnToAxis(this.path, result.position), younger: result.half95, older: result.half95 }
  }
}
