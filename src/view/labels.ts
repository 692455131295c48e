import type { Label, TextRun } from './surface.ts'

/** A label as runs, each with its size and colour settled. */
export function runsOf(label: Label, size: number, colour: string): Required<TextRun>[] {
  const runs = typeof label === 'string' ? [{ text: label }] : label
  return runs.map((run: TextRun) => ({ text: run.text, size: run.size ?? size, colour: run.colour ?? colour }))
}

/** What a label says, without its looks. */
export function plainText(label: Label): string {
  return typeof label === 'string' ? label : label.map((run) => run.text).join('')
}

/** A quantity with its unit set small and quiet behind it: "Depth  mm". */
export function withUnit(title: string, unit: string | null, size: number, quiet: string): Label {
  return unit === null ? title : [{ text: title }, { text: `\u2002${unit}`, size: size * 0.86, colour: quiet }]
}
