import { describe, expect, it } from 'vitest'
import type { FilmReadingSave, FilmReadingSaved, StoredFilmReading } from '#shared/contracts/film.ts'
import { ApiError, OfflineError } from '@/api/call.ts'
import { createFilmOutbox, type OutboxDependencies, type OutboxEntry, type OutboxStore } from '@/api/film-outbox.ts'

const userId = 'u1'
const place = { userId, shopId: 's1', studyId: 't1' }
const id = (n: number) => `01900000-0000-7000-8000-00000000000${n}`

const save = (n: number, depth = 85, change: Partial<FilmReadingSave> = {}): FilmReadingSave => ({
  id: id(n), exposure: 1.7, exposureText: '1.7', replicate: n, depthMicrometres: depth, depthText: String(depth), standardUncertaintyMicrometres: null,
  state: 'measured', exclusionReason: null, note: '', baseVersion: null, withdrawn: false, ...change,
})
const stored = ({ baseVersion, withdrawn: _withdrawn, ...rest }: FilmReadingSave): StoredFilmReading => ({
  ...rest, version: (baseVersion ?? 0) + 1, importBatchId: null, enteredBy: 'Milo', enteredAt: '2026-01-01T00:00:00Z', updatedAt: '2026-01-01T00:00:00Z',
})
const problem = (status: number) => new ApiError({ type: '', title: '', status, code: 'validation-failed', detail: `refused ${status}`, requestId: '' })

function memoryStore(): OutboxStore & { readonly entries: Map<string, OutboxEntry> } {
  const entries = new Map<string, OutboxEntry>()
  return {
    entries,
    all: async () => [...entries.values()],
    update: async (key, change) => {
      const next = change(entries.get(key))
      if (next === undefined) entries.delete(key)
      else entries.set(key, next)
    },
  }
}

type Send = OutboxDependencies['send']
const saveAll: Send = async (_place, readings) => ({ results: readings.map(reading => ({ kind: 'saved', id: reading.id, reading: stored(reading) })), readingsRevision: 1 })

function setUp(send: Send, store = memoryStore()) {
  let n = 0
  let busy = false
  const outbox = createFilmOutbox({
    store, send, newId: () => `n${++n}`, now: () => ++n,
    alone: async run => {
      if (busy) return null
      busy = true
      try {
        return await run()
      } finally {
        busy = false
      }
    },
  })
  return { outbox, store }
}

describe('film outbox', () => {
  it('forgets a cell only when the server has stored that very edit', async () => {
    const { outbox, store } = setUp(saveAll)
    await outbox.put({ ...place, save: save(1) })
    expect(store.entries.size).toBe(1)
    expect(await outbox.flush(userId)).toMatchObject({ kind: 'sent', saved: [{ kind: 'saved' }] })
    expect(store.entries.size).toBe(0)
  })

  it('keeps everything while there is no connection, and sends it once when it is back, also after a reload', async () => {
    let online = false
    const sent: FilmReadingSave[] = []
    const send: Send = async (at, readings) => {
      if (!online) throw new OfflineError(null)
      sent.push(...readings)
      return saveAll(at, readings)
    }
    const { outbox, store } = setUp(send)
    for (const n of [1, 2, 3]) await outbox.put({ ...place, save: save(n) })
    expect(await outbox.flush(userId)).toMatchObject({ kind: 'offline' })
    expect(store.entries.size).toBe(3)
    online = true
    const reloaded = setUp(send, store)
    await reloaded.outbox.flush(userId)
    expect(sent.map(reading => reading.id)).toEqual([id(1), id(2), id(3)])
    expect(store.entries.size).toBe(0)
  })

  it('waits through a lost session and leaves another person’s cells alone', async () => {
    const { outbox, store } = setUp(async () => { throw problem(401) })
    await outbox.put({ ...place, save: save(1) })
    expect((await outbox.flush(userId)).kind).toBe('signed-out')
    const { outbox: others } = setUp(saveAll, store)
    await others.flush('somebody else')
    expect(store.entries.size).toBe(1)
  })

  it('sends what was typed on while the former text was under way, on the version just stored', async () => {
    const sent: FilmReadingSave[] = []
    const store = memoryStore()
    const { outbox } = setUp(async (at, readings) => {
      sent.push(...readings)
      if (sent.length === 1) await outbox.put({ ...place, save: save(1, 99) })
      return saveAll(at, readings)
    }, store)
    await outbox.put({ ...place, save: save(1, 85) })
    await outbox.flush(userId)
    expect(sent.map(reading => [reading.depthMicrometres, reading.baseVersion])).toEqual([[85, null], [99, 1]])
    expect(store.entries.size).toBe(0)
  })

  it('keeps both versions of a stale cell, and sends mine over the other when the person says so', async () => {
    const current = stored(save(7, 90, { baseVersion: 3 }))
    let first = true
    const sent: FilmReadingSave[] = []
    const { outbox, store } = setUp(async (at, readings) => {
      sent.push(...readings)
      if (!first) return saveAll(at, readings)
      first = false
      return { results: readings.map((reading): FilmReadingSaved => ({ kind: 'stale', id: reading.id, current, currentVersion: 4 })), readingsRevision: 1 }
    })
    await outbox.put({ ...place, save: save(1) })
    await outbox.flush(userId)
    const [entry] = await outbox.all()
    expect(entry?.status).toMatchObject({ kind: 'stale', current: { depthMicrometres: 90 } })
    await outbox.flush(userId)
    expect(sent).toHaveLength(1)
    if (entry !== undefined) await outbox.keepMine(entry)
    await outbox.flush(userId)
    // The other reading stands in the cell: mine becomes its next version.
    expect(sent.at(-1)).toMatchObject({ id: id(7), baseVersion: 4, depthMicrometres: 85 })
    expect(store.entries.size).toBe(0)
  })

  it('gives a cell a new id when the server does not know the old one', async () => {
    let first = true
    const sent: FilmReadingSave[] = []
    const { outbox } = setUp(async (at, readings) => {
      sent.push(...readings)
      if (!first) return saveAll(at, readings)
      first = false
      return { results: readings.map((reading): FilmReadingSaved => ({ kind: 'stale', id: reading.id, current: null, currentVersion: 0 })), readingsRevision: 1 }
    })
    await outbox.put({ ...place, save: save(1, 85, { baseVersion: 2 }) })
    await outbox.flush(userId)
    for (const entry of await outbox.all()) await outbox.keepMine(entry)
    await outbox.flush(userId)
    expect(sent.at(-1)?.baseVersion).toBeNull()
    expect(sent.at(-1)?.id).not.toBe(id(1))
  })

  it('does not let one refused cell hold back the others', async () => {
    const { outbox, store } = setUp(async (at, readings) => {
      if (readings.some(reading => reading.id === id(2))) throw problem(422)
      return saveAll(at, readings)
    })
    for (const n of [1, 2, 3]) await outbox.put({ ...place, save: save(n) })
    await outbox.flush(userId)
    expect([...store.entries.values()].map(entry => [entry.save.id, entry.status.kind])).toEqual([[id(2), 'refused']])
  })

  it('never sends text that nobody can read, and sends it once it is mended', async () => {
    const sent: FilmReadingSave[] = []
    const { outbox, store } = setUp(async (at, readings) => {
      sent.push(...readings)
      return saveAll(at, readings)
    })
    await outbox.put({ ...place, save: save(1, 0, { depthMicrometres: null, depthText: '8x5' }), unreadable: 'not a number' })
    await outbox.flush(userId)
    expect(sent).toHaveLength(0)
    expect(store.entries.size).toBe(1)
    await outbox.put({ ...place, save: save(1) })
    await outbox.flush(userId)
    expect(sent).toHaveLength(1)
  })

  it('leaves the sending to the tab that is at it', async () => {
    const { outbox } = setUp(async (at, readings) => {
      expect((await outbox.flush(userId)).kind).toBe('elsewhere')
      return saveAll(at, readings)
    })
    await outbox.put({ ...place, save: save(1) })
    expect((await outbox.flush(userId)).kind).toBe('sent')
  })

  it('tries again later when the server stumbles', async () => {
    const { outbox, store } = setUp(async () => { throw problem(503) })
    await outbox.put({ ...place, save: save(1) })
    expect((await outbox.flush(userId)).kind).toBe('later')
    expect(store.entries.size).toBe(1)
  })
})
