import { darkTheme, lightTheme } from '../../view/theme.ts'

export type LookChoice = 'system' | 'light' | 'dark'

/** Light or dark: the system's, or the user's own choice, remembered. */
class Look {
  #system = window.matchMedia('(prefers-color-scheme: dark)')
  #systemDark = $state(this.#system.matches)
  choice = $state<LookChoice>(remembered())
  dark = $derived(this.choice === 'dark' || (this.choice === 'system' && this.#systemDark))
  theme = $derived(this.dark ? darkTheme : lightTheme)

  constructor() {
    this.#system.addEventListener('change', (event) => (this.#systemDark = event.matches))
  }

  choose(choice: LookChoice): void {
    this.choice = choice
    try {
      localStorage.setItem('look', choice)
    } catch {
      // Without storage the choice lasts for this visit.
    }
  }
}

function remembered(): LookChoice {
  try {
    const choice = localStorage.getItem('look')
    return choice === 'light' || choice === 'dark' ? choice : 'system'
  } catch {
    return 'system'
  }
}

export const look = new Look()
