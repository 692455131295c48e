/** Names of files may hold line ends and control characters; none of them may reach the terminal. */
export function oneLine(text: string): string {
  const control = (c: string) => c < ' ' || (c >= '\x7f' && c < '\xa0') || c === '\u2028' || c === '\u2029'
  return Array.from(text, (c) => (control(c) ? ' ' : c))
    .join('')
    .replace(/ {2,}/g, ' ')
}
