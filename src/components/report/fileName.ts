import type { Core } from '../../document/project.ts'

/** A file name from the core's name: letters, digits and hyphens of any script, never empty. */
export function fileNameOf({ lake, name }: Pick<Core, 'lake' | 'name'>): string {
  const plain = [lake, name]
    .filter(Boolean)
    .join('-')
    .normalize('NFC')
    .replace(/[^\p{L}\p{N}]+/gu, '-')
    .replace(/^-+|-+$/g, '')
    .toLowerCase()
  return plain.slice(0, 80) || 'core'
}
