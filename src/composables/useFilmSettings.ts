import { computed, onScopeDispose, shallowRef, type Ref } from 'vue'
import type { FilmSettings, Study, StudyChange } from '#shared/contracts/studies.ts'

const saveAfterMilliseconds = 500

/** Without the settings that were sent, unless they were changed again meanwhile. */
export function settled(pending: Partial<FilmSettings>, sent: Partial<FilmSettings>): Partial<FilmSettings> {
  const before = new Map<string, unknown>(Object.entries(sent))
  return Object.fromEntries(Object.entries(pending).filter(([name, value]) => !before.has(name) || before.get(name) !== value))
}

/**
 * Film settings that take effect at once and are stored a moment later, one saving at a time: a number typed digit by digit
 * must not meet its own former digits as somebody else's change.
 */
export function useFilmSettings(study: Readonly<Ref<Study | undefined>>, change: (next: StudyChange) => Promise<boolean>, wasStale: () => boolean) {
  const pending = shallowRef<Partial<FilmSettings>>({})
  let timer: ReturnType<typeof setTimeout> | undefined
  let chain: Promise<boolean> = Promise.resolve(true)
  let waiting: ((stored: boolean) => void)[] = []

  const withPending = computed(() => (study.value === undefined ? undefined : { ...study.value, film: { ...study.value.film, ...pending.value } }))

  async function store(): Promise<boolean> {
    const sent = pending.value
    if (study.value === undefined || Object.keys(sent).length === 0) return true
    const stored = await change({ film: { ...study.value.film, ...sent } })
    // A stale change stands in its own notice; without an answer it stays here and is tried again.
    if (stored || wasStale()) pending.value = settled(pending.value, sent)
    return stored
  }

  function flush(): void {
    clearTimeout(timer)
    const told = waiting
    waiting = []
    chain = chain.then(store)
    void chain.then(stored => told.forEach(tell => tell(stored)))
  }

  /** Answers when the change is stored, or not. */
  function set(next: Partial<FilmSettings>): Promise<boolean> {
    pending.value = { ...pending.value, ...next }
    clearTimeout(timer)
    timer = setTimeout(flush, saveAfterMilliseconds)
    return new Promise(resolve => waiting.push(resolve))
  }

  window.addEventListener('online', flush)
  onScopeDispose(() => {
    window.removeEventListener('online', flush)
    // Leaving the page must not lose the last digits.
    if (Object.keys(pending.value).length > 0) flush()
  })
  return { study: withPending, set }
}
