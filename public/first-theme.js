/* global document, localStorage, matchMedia */
// Sets the theme before the first pixel: eyes used to the dark must not meet a bright page while the client loads.
// The same choice as src/stores/preferences.ts; a file of its own, since no script may stand in the document.
try {
  const kept = localStorage.getItem('fanlight.theme')
  const system = matchMedia('(prefers-color-scheme: dark)').matches ? 'safelight' : 'daylight'
  document.documentElement.dataset.theme = kept === 'daylight' || kept === 'safelight' ? kept : system
} catch {
  // Without storage the client chooses.
}
