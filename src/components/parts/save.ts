/** Hands a file to the browser to be saved where the user's downloads go. */
export function save(name: string, content: Blob | string | Uint8Array<ArrayBuffer>): void {
  const type = name.endsWith('.svg') ? 'image/svg+xml' : name.endsWith('.csv') ? 'text/csv' : 'application/octet-stream'
  const blob = content instanceof Blob ? content : new Blob([content], { type })
  const url = URL.createObjectURL(blob)
  const link = document.createElement('a')
  link.href = url
  link.download = name
  link.click()
  // The download has begun by then; holding the URL longer would hold the whole file in memory.
  setTimeout(() => URL.revokeObjectURL(url), 30_000)
}
