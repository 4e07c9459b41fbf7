import { defineStore } from 'pinia'
import { ref, watchEffect } from 'vue'

export type Theme = 'daylight' | 'safelight'

const themeKey = 'fanlight.theme'

function firstTheme(): Theme {
  const kept = localStorage.getItem(themeKey)
  if (kept === 'daylight' || kept === 'safelight') return kept
  return window.matchMedia('(prefers-color-scheme: dark)').matches ? 'safelight' : 'daylight'
}

/** What a person chose for this browser. */
export const usePreferencesStore = defineStore('preferences', () => {
  const theme = ref<Theme>(firstTheme())

  watchEffect(() => {
    document.documentElement.dataset.theme = theme.value
  })

  function chooseTheme(next: Theme): void {
    theme.value = next
    localStorage.setItem(themeKey, next)
  }

  return { theme, chooseTheme }
})
