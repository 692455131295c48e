import type { Label, TextRun } from './surface.ts'

/** A label as runs, each with its size, colour and gap settled. */
export function runsOf(label: Label, size: number, colour: string): Required<TextRun>[] {
  const runs = typeof label === 'string' ? [{ text: label }] : label
  return runs.map((run: TextRun) => ({
    text: run.text,
    size: run.size ?? size,
    colour: run.colour ?? colour,
    gap: run.gap ?? 0,
  }))
}

/** What a label says, without its looks; a gap reads as a space. */
export function plainText(label: Label): string {
  return typeof label === 'string' ? label : label.map((run) => (run.gap ? ` ${run.text}` : run.text)).join('')
}

/** A quantity with its unit set small and quiet behind it: "Depth  mm". */
export function withUnit(title: string, unit: string | null, size: number, quiet: string): Label {
  return unit === null ? title : [{ text: title }, { text: unit, size: size * 0.86, colour: quiet, gap: size * 0.45 }]
}
