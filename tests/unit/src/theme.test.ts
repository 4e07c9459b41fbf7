import { readFileSync } from 'node:fs'
import { createPinia, setActivePinia } from 'pinia'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { nextTick } from 'vue'
import { usePreferencesStore } from '@/stores/preferences.ts'

const beforeThePage = readFileSync('public/first-theme.js', 'utf8')
const shown = () => document.documentElement.dataset.theme

beforeEach(() => {
  localStorage.clear()
  delete document.documentElement.dataset.theme
  setActivePinia(createPinia())
})
afterEach(() => vi.unstubAllGlobals())

const cases = [
  { system: 'dark', kept: null, theme: 'safelight' },
  { system: 'light', kept: null, theme: 'daylight' },
  { system: 'dark', kept: 'daylight', theme: 'daylight' },
  { system: 'light', kept: 'safelight', theme: 'safelight' },
  { system: 'light', kept: 'neon', theme: 'daylight' },
] as const

describe.each(cases)('a $system system with $kept kept', ({ system, kept, theme }) => {
  beforeEach(() => {
    vi.stubGlobal('matchMedia', (query: string) => ({ matches: query === '(prefers-color-scheme: dark)' && system === 'dark' }))
    if (kept !== null) localStorage.setItem('fanlight.theme', kept)
  })

  it(`begins with ${theme}, before the client loads and after`, async () => {
    new Function(beforeThePage)()
    expect(shown()).toBe(theme)
    expect(usePreferencesStore().theme).toBe(theme)
    await nextTick()
    expect(shown()).toBe(theme)
  })
})

it('a chosen theme shows at once and stays chosen', async () => {
  vi.stubGlobal('matchMedia', () => ({ matches: false }))
  usePreferencesStore().chooseTheme('safelight')
  await nextTick()
  expect(shown()).toBe('safelight')
  setActivePinia(createPinia())
  expect(usePreferencesStore().theme).toBe('safelight')
})
