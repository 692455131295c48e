import type { Journal } from '../document/journal.ts'
import type { Count, Note } from '../document/project.ts'

/**
 * The notes of a transect that may be seen, sorted downcore. While a blind count is made only those written since it began are:
 * an earlier remark could tell where another counter saw a year.
 */
export function notesInSight(notes: readonly Note[], journal: Journal, transect: string, blind: Count | null): Note[] {
  const own = notes.filter((note) => note.transect === transect).sort((a, b) => a.position - b.position)
  if (!blind) return own
  const since = new Set<string>()
  for (let seq = journal.version; ; seq--) {
    const transaction = journal.at(seq)
    if (!transaction) return []
    for (const step of transaction.steps) {
      if (step.kind !== 'add') continue
      if (step.collection === 'notes') since.add(step.record.id)
      else if (step.collection === 'counts' && step.record.id === blind.id) return own.filter(({ id }) => since.has(id))
    }
  }
}
