import type { Frame, Painter, Surface } from '../surface.ts'
import type { Theme } from '../theme.ts'
import { toScreen } from '../viewport.ts'
import { densityRows, eachRow, fullDensity, isDense } from './columns.ts'
import type { CompareData } from './data.ts'

/** Room at the right for the marks of disagreement, CSS pixels. */
const gutter = 14

/** Lane of a counter; names stand above it in the page's own type. */
export function compareLane(frame: Frame, counters: number, k: number): Frame {
  const width = (frame.width - gutter) / Math.max(1, counters)
  return { x: frame.x + k * width + 4, y: frame.y, width: width - 8, height: frame.height }
}

/**
 * Several counts side by side. Where sites are aligned, a hairline joins what is thought to be the same boundary, a ring
 * stands where a counter saw none, and a triangle at the right where they disagree: filled where one saw none, open where
 * one only doubted.
 */
export const paintCompare: Painter<CompareData> = (surface, frame, data, theme) => {
  surface.clip(frame, () => {
    if (data.sites) paintSites(surface, frame, data, data.sites, theme)
    data.counters.forEach(({ column, name }, k) => {
      const lane = compareLane(frame, data.counters.length, k)
      surface.group(`counter ${name}`, () => {
        if (isDense(data.viewport, column.position)) paintDense(surface, lane, data, column.position, theme)
        else paintMarks(surface, lane, data, column, theme)
      })
    })
    if (data.cursor !== null) {
      const y = frame.y + toScreen(data.viewport, data.cursor)
      surface.line(frame.x, y, frame.x + frame.width, y, { colour: theme.accent, width: theme.stroke.hair })
    }
  })
}

function paintMarks(
  surface: Surface,
  lane: Frame,
  data: CompareData,
  column: CompareData['counters'][number]['column'],
  theme: Theme,
): void {
  const whole: number[] = []
  const broken: number[] = []
  const third = lane.width / 3
  eachRow(data.viewport, column.position, surface.pixelRatio, (i, y) => {
    const line = lane.y + y
    const right = lane.x + lane.width
    if (column.mark[i] === 0) whole.push(lane.x, line, right, line)
    if (column.mark[i] === 1) broken.push(lane.x, line, lane.x + third, line, right - third, line, right, line)
  })
  surface.lines(whole, { colour: theme.ink, width: theme.stroke.thin })
  surface.lines(broken, { colour: theme.ink, width: theme.stroke.thin })
}

function paintDense(surface: Surface, lane: Frame, data: CompareData, position: Float64Array, theme: Theme): void {
  const step = 1 / surface.pixelRatio
  const full = fullDensity(data.viewport, position)
  const bars: number[] = []
  densityRows(data.viewport, position, full, step).forEach((density, row) => {
    const line = lane.y + (row + 0.5) * step
    if (density > 0) bars.push(lane.x, line, lane.x + density * lane.width, line)
  })
  surface.lines(bars, { colour: theme.faint, width: step, opacity: 0.6 })
}

function paintSites(
  surface: Surface,
  frame: Frame,
  data: CompareData,
  sites: NonNullable<CompareData['sites']>,
  theme: Theme,
): void {
  const counters = data.counters.length
  const dense = isDense(data.viewport, sites.position)
  const joints: number[] = []
  const absent: [number, number][] = []
  const missed: number[] = []
  const doubted: number[] = []
  eachSite(surface, data, sites, dense, (site, y) => {
    let least = 2
    let most = 0
    for (let k = 0; k < counters; k++) {
      const label = sites.label[site * counters + k]
      least = Math.min(least, label)
      most = Math.max(most, label)
      if (dense) continue
      const lane = compareLane(frame, counters, k)
      const here = label === 0 ? y : toScreen(data.viewport, sites.own[site * counters + k])
      if (label === 0) absent.push([lane.x + lane.width / 2, frame.y + y])
      if (k + 1 < counters) {
        const next = sites.own[site * counters + k + 1]
        const there = Number.isNaN(next) ? y : toScreen(data.viewport, next)
        joints.push(lane.x + lane.width, frame.y + here, lane.x + lane.width + 8, frame.y + there)
      }
    }
    if (least !== most) (least === 0 ? missed : doubted).push(frame.y + y)
  })
  surface.lines(joints, { colour: theme.faint, width: theme.stroke.hair })
  for (const [x, y] of absent) {
    surface.marker('circle', x, y, 5, { stroke: { colour: theme.ink, width: theme.stroke.hair } })
  }
  paintGutter(surface, frame, missed, doubted, dense, theme)
}

/** Close up all sites; from afar one in each device row, and never an agreement instead of a disagreement. */
function eachSite(
  surface: Surface,
  data: CompareData,
  sites: NonNullable<CompareData['sites']>,
  dense: boolean,
  each: (site: number, y: number) => void,
): void {
  const { viewport, counters } = data
  if (!dense) {
    eachRow(viewport, sites.position, surface.pixelRatio, each)
    return
  }
  const spread = (site: number) => {
    let [least, most] = [2, 0]
    for (let k = site * counters.length; k < (site + 1) * counters.length; k++) {
      if (sites.label[k] < least) least = sites.label[k]
      if (sites.label[k] > most) most = sites.label[k]
    }
    return most - least
  }
  eachRow(viewport, sites.position, surface.pixelRatio, (first, y, end) => {
    let worst = first
    for (let site = first, apart = 0; site < end && apart < 2; site++) {
      const here = spread(site)
      if (here > apart) [worst, apart] = [site, here]
    }
    each(worst, y)
  })
}

function paintGutter(
  surface: Surface,
  frame: Frame,
  missed: number[],
  doubted: number[],
  dense: boolean,
  theme: Theme,
): void {
  const right = frame.x + frame.width
  if (dense) {
    const step = 1 / surface.pixelRatio
    surface.lines(
      missed.flatMap((y) => [right - 10, y, right - 2, y]),
      { colour: theme.ink, width: step },
    )
    surface.lines(
      doubted.flatMap((y) => [right - 5, y, right - 2, y]),
      { colour: theme.faint, width: step },
    )
    return
  }
  for (const y of missed) surface.marker('left', right - 6, y, 7, { fill: theme.ink })
  for (const y of doubted) {
    surface.marker('left', right - 6, y, 7, { stroke: { colour: theme.ink, width: theme.stroke.hair } })
  }
}
