/**
 * Checks that a text is well-formed XML as far as figures need it: every element closed in order, attributes quoted and
 * unique, no bare < or &, only known entities. Returns the names of the elements in order; throws with the place otherwise.
 */
export function elementsOf(xml: string): string[] {
  const open: string[] = []
  const names: string[] = []
  const body = xml.replace(/^<\?xml [^?]*\?>\s*/, '')
  const token = /<(\/?)([A-Za-z][\w-]*)((?:\s+[\w:-]+="[^"<]*")*)\s*(\/?)>|([^<]+)/gy
  let at = 0
  while (at < body.length) {
    token.lastIndex = at
    const match = token.exec(body)
    if (!match) throw new Error(`not well-formed at: ${body.slice(at, at + 60)}`)
    const [whole, closing, name, attributes, empty, text] = match as unknown as (string | undefined)[]
    for (const part of [attributes ?? '', text ?? '']) {
      const bare = /&(?!(?:amp|lt|gt|quot|#39);)/.exec(part)
      if (bare) throw new Error(`bare & in: ${part}`)
    }
    if (name !== undefined) {
      const keys = Array.from((attributes ?? '').matchAll(/([\w:-]+)=/g), (one) => one[1])
      if (new Set(keys).size < keys.length) throw new Error(`an attribute stands twice in: ${whole ?? ''}`)
      if (closing === '/') {
        if (open.pop() !== name) throw new Error(`</${name}> closes nothing`)
      } else {
        names.push(name)
        if (empty !== '/') open.push(name)
      }
    }
    at = token.lastIndex
  }
  if (open.length > 0) throw new Error(`not closed: ${open.join(', ')}`)
  return names
}
