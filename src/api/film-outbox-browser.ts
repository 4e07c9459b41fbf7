import { createStore } from 'idb-keyval'
import { v7 } from 'uuid'
import { saveFilmReadings } from '#shared/contracts/film.ts'
import { call } from './call.ts'
import { createFilmOutbox, outboxEntrySchema, type OutboxEntry, type OutboxStore } from './film-outbox.ts'

const entriesOf = (values: readonly unknown[]): readonly OutboxEntry[] =>
  values.flatMap(value => {
    const parsed = outboxEntrySchema.safeParse(value)
    return parsed.success ? [parsed.data] : []
  })

const asPromise = <T>(request: IDBRequest<T>): Promise<T> =>
  new Promise((resolve, reject) => {
    request.onsuccess = () => resolve(request.result)
    request.onerror = () => reject(request.error)
  })

/** One transaction reads and writes, so that two tabs cannot lose each other's edits. */
function browserStore(): OutboxStore {
  const use = createStore('fanlight-film', 'outbox')
  return {
    all: async () => entriesOf(await use('readonly', store => asPromise<unknown[]>(store.getAll()))),
    update: (key, change) =>
      use('readwrite', store => new Promise<void>((resolve, reject) => {
        const read = store.get(key)
        read.onsuccess = () => {
          const [old] = entriesOf([read.result])
          const next = change(old)
          if (next === undefined) store.delete(key)
          else store.put(next, key)
          store.transaction.oncomplete = () => resolve()
          store.transaction.onerror = () => reject(store.transaction.error)
        }
        read.onerror = () => reject(read.error)
      })),
  }
}

/** A browser that keeps nothing (private windows of some) still holds the cells while the page stands. */
function withMemory(kept: OutboxStore): OutboxStore & { readonly keepsNothing: () => boolean } {
  const memory = new Map<string, OutboxEntry>()
  let broken = false
  return {
    keepsNothing: () => broken,
    all: async () => {
      const stored = broken ? [] : await kept.all().catch(() => { broken = true; return [] })
      return [...stored, ...memory.values()]
    },
    update: async (key, change) => {
      if (!broken) {
        try {
          await kept.update(key, change)
          return
        } catch {
          broken = true
        }
      }
      const next = change(memory.get(key))
      if (next === undefined) memory.delete(key)
      else memory.set(key, next)
    },
  }
}

const store = withMemory(browserStore())
export const browserKeepsNothing = store.keepsNothing

/** Tells other tabs that the outbox changed. */
export const outboxChannelName = 'fanlight-film-outbox'

/** The outbox of this browser: IndexedDB keeps it, a Web Lock keeps two tabs from sending the same cell. */
export const filmOutbox = createFilmOutbox({
  store,
  send: ({ shopId, studyId }, readings) => call(saveFilmReadings, { params: { shopId, studyId }, body: { readings: [...readings] } }),
  alone: async run => {
    if (navigator.locks === undefined) return run()
    return navigator.locks.request('fanlight-film-outbox', { ifAvailable: true }, lock => (lock === null ? null : run()))
  },
  newId: v7,
  now: Date.now,
})
