import { signal } from '@preact/signals'

/** What this device was told; `system` follows the operating system. Public/theme.js reads it first. */
export type ThemeChoice = 'system' | 'light' | 'dark'

const key = 'hoarline.theme'

const stored = (): ThemeChoice => {
  try {
    const value = localStorage.getItem(key)
    return value === 'light' || value === 'dark' ? value : 'system'
  } catch {
    return 'system'
  }
}

const system = matchMedia('(prefers-color-scheme: dark)')

export const themeChoice = signal<ThemeChoice>(stored())

/** The theme in force; canvases read their colours again when it changes. */
export const theme = signal<'light' | 'dark'>(system.matches ? 'dark' : 'light')

const apply = (): void => {
  const choice = themeChoice.value
  const dark = choice === 'dark' || (choice === 'system' && system.matches)
  // First the document, then the signal: who listens to the signal reads the new colours.
  document.documentElement.dataset.theme = dark ? 'dark' : 'light'
  theme.value = dark ? 'dark' : 'light'
}

system.addEventListener('change', apply)
apply()

/** Chooses the theme on this device only. */
export const chooseTheme = (choice: ThemeChoice): void => {
  themeChoice.value = choice
  try {
    if (choice === 'system') localStorage.removeItem(key)
    else localStorage.setItem(key, choice)
  } catch {
    // Without storage the choice lasts as long as the page.
  }
  apply()
}
