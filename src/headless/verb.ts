/** What the command line gave: words without a name in order, and options by name. */
export interface Call {
  words: string[]
  options: Options
}

export type Options = Readonly<Partial<Record<string, string | boolean>>>

/** An option of a verb; every verb also takes --help, --out and --json. */
export interface OptionKind {
  type: 'string' | 'boolean'
}

/** One verb of the command: `npx winterclay NAME …`. */
export interface Verb {
  name: string
  /** One line for the list of verbs. */
  summary: string
  /** What `--help` prints: usage, options with their defaults, what is written. */
  help: string
  options: Readonly<Record<string, OptionKind>>
  run(call: Call): Promise<void>
}
