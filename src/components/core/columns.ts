import type { StepId } from '../../session/session.svelte.ts'
import type { Frame } from '../../view/surface.ts'

/** Room above the columns for their names, CSS pixels. */
export const headroom = 22
const gap = 10

export type ColumnName = 'overview' | 'axis' | 'scan' | 'profile' | 'ladder' | 'side'

/** Where each column beside the core lies, and what its heading says. All share one depth axis. */
export interface Columns {
  frames: Record<ColumnName, Frame>
  headings: { name: string; x: number; width: number }[]
}

export function columnsFor(width: number, height: number, step: StepId, depthUnit: string, sideName: string): Columns {
  const fixed: Record<Exclude<ColumnName, 'scan'>, number> = {
    overview: 46,
    axis: 54,
    profile: width > 620 ? 130 : 84,
    ladder: 104,
    side: step === 'compare' ? Math.max(110, Math.round(width * 0.2)) : 66,
  }
  const others = Object.values(fixed).reduce((sum, one) => sum + one, 0)
  const scan = Math.max(80, width - others - 5 * gap - 20)
  const frames = {} as Record<ColumnName, Frame>
  let x = 8
  for (const name of ['overview', 'axis', 'scan', 'profile', 'ladder', 'side'] as const) {
    const columnWidth = name === 'scan' ? scan : fixed[name]
    frames[name] = { x, y: headroom, width: columnWidth, height: Math.max(1, height - headroom) }
    x += columnWidth + gap
  }
  const heading = (name: string, column: ColumnName) => ({ name, x: frames[column].x, width: frames[column].width })
  return {
    frames,
    headings: [
      heading('Core', 'overview'),
      heading(`Depth, ${depthUnit}`, 'axis'),
      heading('Scan', 'scan'),
      heading('Profile', 'profile'),
      heading('Years', 'ladder'),
      heading(sideName, 'side'),
    ],
  }
}

/** The column under a point, null between them. */
export function columnAt(columns: Columns, x: number): ColumnName | null {
  const entry = Object.entries(columns.frames).find(
    ([, frame]) => x >= frame.x - gap / 2 && x < frame.x + frame.width + gap / 2,
  )
  return entry ? (entry[0] as ColumnName) : null
}
