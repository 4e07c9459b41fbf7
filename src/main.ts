import '@fontsource-variable/atkinson-hyperlegible-next/wght.css'
import '@fontsource-variable/atkinson-hyperlegible-mono/wght.css'
import '@fontsource-variable/source-sans-3/wght.css'
import './assets/styles/base.css'
import { VueQueryPlugin } from '@tanstack/vue-query'
import { createPinia } from 'pinia'
import { createApp } from 'vue'
import App from './App.vue'
import { queryClient } from './api/query-client.ts'
import { createAppRouter } from './router/index.ts'

// A page from before a new release asks for pieces that are gone: load the new one, once; what was typed is kept.
const reloadedKey = 'fanlight.reloaded'
window.addEventListener('vite:preloadError', event => {
  // Without a connection a reload would take the page away.
  if (!navigator.onLine || Date.now() - Number(sessionStorage.getItem(reloadedKey) ?? 0) < 10_000) return
  sessionStorage.setItem(reloadedKey, String(Date.now()))
  event.preventDefault()
  window.location.reload()
})

const app = createApp(App)
app.use(createPinia())
app.use(VueQueryPlugin, { queryClient })
app.use(createAppRouter())
app.mount('#app')
