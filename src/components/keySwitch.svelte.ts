const place = 'winterclay-letters'

/**
 * Whether single letters act wherever the focus is. Switched off, they act only while the core itself has the focus, so
 * that dictation and slips of the hand do no harm (WCAG 2.2, 2.1.4).
 */
class KeySwitch {
  #letters = $state(remembered())

  get letters(): boolean {
    return this.#letters
  }

  set letters(on: boolean) {
    this.#letters = on
    try {
      localStorage.setItem(place, on ? 'everywhere' : 'core only')
    } catch {
      // Without storage the choice lasts for this visit.
    }
  }
}

function remembered(): boolean {
  try {
    return localStorage.getItem(place) !== 'core only'
  } catch {
    return true
  }
}

export const keySwitch = new KeySwitch()
