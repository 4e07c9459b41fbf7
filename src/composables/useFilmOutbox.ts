import { computed, onScopeDispose, shallowRef, watch } from 'vue'
import type { FilmReadingSave, FilmReadingSaved } from '#shared/contracts/film.ts'
import { browserKeepsNothing, filmOutbox, outboxChannelName } from '@/api/film-outbox-browser.ts'
import type { OutboxEntry, SentRevision } from '@/api/film-outbox.ts'
import type { StudyPlace } from './useStudy.ts'

export type SendingState = 'idle' | 'sending' | 'offline' | 'signed-out' | 'later'

const sendAfterMilliseconds = 120
const retryMilliseconds = 5000

/** What waits to be sent of one study, and its sending: at once, when the connection is back, after signing in again, after a reload. */
export function useFilmOutbox(place: () => StudyPlace, userId: () => string, onSaved: (results: readonly FilmReadingSaved[], revisions: readonly SentRevision[]) => Promise<void>) {
  const all = shallowRef<readonly OutboxEntry[]>([])
  const sending = shallowRef<SendingState>('idle')
  const sentence = shallowRef('')
  const keepsNothing = shallowRef(false)
  const channel = typeof BroadcastChannel === 'undefined' ? null : new BroadcastChannel(outboxChannelName)
  let timer: ReturnType<typeof setTimeout> | undefined

  const entries = computed(() => all.value.filter(entry => entry.studyId === place().studyId && entry.userId === userId()))
  const elsewhere = computed(() => all.value.filter(entry => entry.studyId !== place().studyId && entry.userId === userId()).length)
  const ofOthers = computed(() => all.value.filter(entry => entry.userId !== userId()).length)

  async function refresh(): Promise<void> {
    all.value = await filmOutbox.all()
    keepsNothing.value = browserKeepsNothing()
  }

  function sendSoon(after = sendAfterMilliseconds): void {
    clearTimeout(timer)
    timer = setTimeout(() => void sendNow(), after)
  }

  async function sendNow(): Promise<void> {
    if (!all.value.some(entry => entry.status.kind === 'waiting' && entry.userId === userId())) {
      sending.value = 'idle'
      return
    }
    sending.value = 'sending'
    const outcome = await filmOutbox.flush(userId())
    if ('saved' in outcome && outcome.saved.length > 0) {
      await onSaved(outcome.saved, outcome.revisions)
      channel?.postMessage({ saved: outcome.saved, revisions: outcome.revisions })
    }
    await refresh()
    sending.value = outcome.kind === 'sent' || outcome.kind === 'elsewhere' ? 'idle' : outcome.kind
    sentence.value = 'sentence' in outcome ? outcome.sentence : ''
    if (all.value.some(entry => entry.status.kind === 'waiting' && entry.userId === userId())) sendSoon(outcome.kind === 'sent' ? sendAfterMilliseconds : retryMilliseconds)
  }

  /** Keeps cells; they show at once, and are written to the browser's database before they are sent. */
  async function put(saves: readonly { readonly save: FilmReadingSave; readonly unreadable: string | null }[]): Promise<void> {
    const { shopId, studyId } = place()
    const typed = saves.map(({ save, unreadable }) => ({ userId: userId(), shopId, studyId, save, ...(unreadable === null ? {} : { unreadable }) }))
    const ids = new Set(typed.map(({ save }) => save.id))
    const shown = typed.map((entry): OutboxEntry => ({ ...entry, edit: '', typedAt: Date.now(), status: entry.unreadable === undefined ? { kind: 'waiting' } : { kind: 'unreadable', sentence: entry.unreadable } }))
    all.value = [...all.value.filter(entry => !ids.has(entry.save.id)), ...shown]
    for (const entry of typed) await filmOutbox.put(entry)
    await refresh()
    channel?.postMessage({ saved: [], revisions: [] })
    sendSoon()
  }

  async function keepMine(entry: OutboxEntry): Promise<void> {
    await filmOutbox.keepMine(entry)
    await refresh()
    sendSoon()
  }
  async function drop(entry: OutboxEntry): Promise<void> {
    await filmOutbox.drop(entry)
    await refresh()
  }
  async function retry(entry: OutboxEntry): Promise<void> {
    await filmOutbox.retry(entry)
    await refresh()
    sendSoon()
  }

  const again = () => sendSoon(0)
  if (channel !== null) {
    channel.onmessage = (event: MessageEvent<{ saved: readonly FilmReadingSaved[]; revisions: readonly SentRevision[] }>) => void onSaved(event.data.saved, event.data.revisions).then(refresh)
  }
  window.addEventListener('online', again)
  window.addEventListener('focus', again)
  onScopeDispose(() => {
    clearTimeout(timer)
    channel?.close()
    window.removeEventListener('online', again)
    window.removeEventListener('focus', again)
  })
  watch(() => [userId(), place().studyId], () => void refresh().then(again), { immediate: true })

  return { entries, elsewhere, ofOthers, sending, sentence, keepsNothing, put, keepMine, drop, retry, sendNow }
}
export type FilmOutboxHandle = ReturnType<typeof useFilmOutbox>
