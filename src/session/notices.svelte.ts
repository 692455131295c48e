export interface Notice {
  id: number
  tone: 'trouble' | 'word'
  text: string
}

/** What the page has to say to the user until it is read: troubles stay until dismissed, words pass by themselves. */
export class Notices {
  #next = 1
  list = $state.raw<readonly Notice[]>([])

  /** Something went wrong: what, where, what to do. */
  trouble(text: string): void {
    this.#add('trouble', text)
  }

  /** Something was done that is not seen otherwise. */
  word(text: string): void {
    const id = this.#add('word', text)
    setTimeout(() => this.dismiss(id), 6000)
  }

  dismiss(id: number): void {
    this.list = this.list.filter((notice) => notice.id !== id)
  }

  #add(tone: Notice['tone'], text: string): number {
    const id = this.#next++
    // The same words twice are one notice, moved to the end.
    this.list = [...this.list.filter((notice) => notice.text !== text), { id, tone, text }]
    return id
  }
}
