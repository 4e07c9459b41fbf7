import { z } from 'zod'
import { filmReadingSaveSchema, filmReadingSchema, type FilmReadingSave, type FilmReadingSaved, type StoredFilmReading } from '#shared/contracts/film.ts'
import { ApiError, OfflineError } from './call.ts'

const statusSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('waiting') }),
  /** Somebody else was there first: both versions are shown, a person chooses. */
  z.object({ kind: z.literal('stale'), current: filmReadingSchema.nullable(), currentVersion: z.int() }),
  z.object({ kind: z.literal('refused'), sentence: z.string() }),
  /** Typed, but not understood: kept as typed, never sent. */
  z.object({ kind: z.literal('unreadable'), sentence: z.string() }),
])

/** The rule that a measured film has a thickness does not hold for text that nobody can read yet. */
const keptSaveSchema = z.object(filmReadingSaveSchema.shape)

/** One cell that was typed and is not yet known to be stored. */
export const outboxEntrySchema = z.object({
  userId: z.string(),
  shopId: z.string(),
  studyId: z.string(),
  save: keptSaveSchema,
  /** Changes with every edit: an answer to a former edit must not remove a later one. */
  edit: z.string(),
  typedAt: z.number(),
  status: statusSchema,
})
export type OutboxEntry = z.infer<typeof outboxEntrySchema>

/** Kept in the browser's database; `update` is one atomic step, also between tabs. */
export interface OutboxStore {
  readonly all: () => Promise<readonly OutboxEntry[]>
  readonly update: (key: string, change: (old: OutboxEntry | undefined) => OutboxEntry | undefined) => Promise<void>
}

export interface OutboxDependencies {
  readonly store: OutboxStore
  readonly send: (place: { shopId: string; studyId: string }, readings: readonly FilmReadingSave[]) => Promise<{ readonly results: readonly FilmReadingSaved[]; readonly readingsRevision: number }>
  /** Runs alone among all tabs; answers null when another tab is at it. */
  readonly alone: <T>(run: () => Promise<T>) => Promise<T | null>
  readonly newId: () => string
  readonly now: () => number
}

/** One answered sending: where the study's readings stand after it. */
export interface SentRevision {
  readonly studyId: string
  readonly readingsRevision: number
}

export type FlushOutcome =
  | { readonly kind: 'sent'; readonly saved: readonly FilmReadingSaved[]; readonly revisions: readonly SentRevision[] }
  /** Another tab is sending: its answers come through the store. */
  | { readonly kind: 'elsewhere' }
  | { readonly kind: 'offline' | 'signed-out' | 'later'; readonly saved: readonly FilmReadingSaved[]; readonly revisions: readonly SentRevision[]; readonly sentence: string }

export interface Typed {
  readonly userId: string
  readonly shopId: string
  readonly studyId: string
  readonly save: FilmReadingSave
  readonly unreadable?: string
}

export const entryKey = (entry: { readonly studyId: string; readonly save: { readonly id: string } }) => `${entry.studyId}/${entry.save.id}`

/** Small enough that one slow call does not hold up the bench, well below what the contract takes. */
const batchSize = 500

/**
 * Cells typed at the bench, kept in the browser until the server has answered for each of them.
 *
 * A cell is written here before it is sent; it survives reload, lost connection and lost session, and leaves only when the
 * server says that this very edit is stored.
 */
export function createFilmOutbox({ store, send, alone, newId, now }: OutboxDependencies) {
  /** Keeps an edit; one cell has one entry, and the newest text wins. The version it was made on stays the server's. */
  async function put(typed: Typed): Promise<void> {
    await store.update(entryKey(typed), old => ({
      userId: typed.userId, shopId: typed.shopId, studyId: typed.studyId,
      save: old === undefined ? typed.save : { ...typed.save, baseVersion: old.save.baseVersion },
      edit: newId(),
      typedAt: now(),
      status: typed.unreadable !== undefined ? { kind: 'unreadable', sentence: typed.unreadable } : old?.status.kind === 'stale' ? old.status : { kind: 'waiting' },
    }))
  }

  const drop = (entry: OutboxEntry) => store.update(entryKey(entry), () => undefined)

  async function settle(sent: OutboxEntry, result: FilmReadingSaved): Promise<void> {
    await store.update(entryKey(sent), old => {
      if (old === undefined) return undefined
      if (result.kind === 'stale') return { ...old, status: { kind: 'stale', current: result.current, currentVersion: result.currentVersion } }
      if (old.edit === sent.edit) return undefined
      // Typed on while the former text was under way: the new text stands on the version just stored.
      const version = result.kind === 'saved' ? result.reading.version : result.version
      return { ...old, save: { ...old.save, baseVersion: version } }
    })
  }

  async function sendChunk(entries: readonly OutboxEntry[], revisions: SentRevision[]): Promise<readonly FilmReadingSaved[]> {
    const [first] = entries
    if (first === undefined) return []
    try {
      const { results, readingsRevision } = await send(first, entries.map(entry => entry.save))
      revisions.push({ studyId: first.studyId, readingsRevision })
      const byId = new Map(results.map(result => [result.id, result]))
      for (const entry of entries) {
        const result = byId.get(entry.save.id)
        if (result !== undefined) await settle(entry, result)
      }
      return results
    } catch (error) {
      if (!(error instanceof ApiError) || !isAboutTheCells(error)) throw error
      // One cell must not hold back the others: find it by sending each alone.
      if (entries.length > 1) {
        const saved: FilmReadingSaved[] = []
        for (const entry of entries) saved.push(...(await sendChunk([entry], revisions)))
        return saved
      }
      await store.update(entryKey(first), old => (old?.edit === first.edit ? { ...old, status: { kind: 'refused', sentence: error.problem.detail } } : old))
      return []
    }
  }

  /** Sends what waits, of one person, of all their studies. */
  async function flush(userId: string): Promise<FlushOutcome> {
    const outcome = await alone(async (): Promise<FlushOutcome> => {
      const saved: FilmReadingSaved[] = []
      const revisions: SentRevision[] = []
      try {
        // Once around again: what was typed while sending goes out too.
        for (let round = 0; round < 5; round++) {
          const waiting = (await store.all()).filter(entry => entry.userId === userId && entry.status.kind === 'waiting')
          if (waiting.length === 0) break
          for (const chunk of chunks(waiting)) saved.push(...(await sendChunk(chunk, revisions)))
        }
        return { kind: 'sent', saved, revisions }
      } catch (error) {
        if (error instanceof OfflineError) return { kind: 'offline', saved, revisions, sentence: error.message }
        if (error instanceof ApiError && error.problem.status === 401) return { kind: 'signed-out', saved, revisions, sentence: error.problem.detail }
        return { kind: 'later', saved, revisions, sentence: error instanceof ApiError ? error.problem.detail : 'The answer could not be read.' }
      }
    })
    return outcome ?? { kind: 'elsewhere' }
  }

  /** The person's own version goes over the other one. */
  async function keepMine(entry: OutboxEntry): Promise<void> {
    if (entry.status.kind !== 'stale') return
    const { current, currentVersion } = entry.status
    const id = current === null ? (currentVersion === 0 ? newId() : entry.save.id) : current.id
    const save = { ...entry.save, id, baseVersion: currentVersion === 0 ? null : currentVersion }
    await drop(entry)
    await store.update(entryKey({ ...entry, save }), () => ({ ...entry, save, edit: newId(), status: { kind: 'waiting' } }))
  }

  /** A refused cell is tried again. */
  const retry = (entry: OutboxEntry) => store.update(entryKey(entry), old => (old === undefined ? undefined : { ...old, status: { kind: 'waiting' } }))

  return { put, flush, keepMine, drop, retry, all: store.all }
}
export type FilmOutbox = ReturnType<typeof createFilmOutbox>

const isAboutTheCells = (error: ApiError) => [400, 403, 404, 409, 413, 422].includes(error.problem.status)

function chunks(entries: readonly OutboxEntry[]): readonly (readonly OutboxEntry[])[] {
  const byStudy = new Map<string, OutboxEntry[]>()
  for (const entry of [...entries].sort((a, b) => a.typedAt - b.typedAt)) {
    const place = `${entry.shopId}/${entry.studyId}`
    byStudy.set(place, [...(byStudy.get(place) ?? []), entry])
  }
  return [...byStudy.values()].flatMap(group => Array.from({ length: Math.ceil(group.length / batchSize) }, (_, i) => group.slice(i * batchSize, (i + 1) * batchSize)))
}

/** The version of a reading that a result tells. */
export const versionOf = (result: FilmReadingSaved): number => (result.kind === 'saved' ? result.reading.version : result.kind === 'stale' ? result.currentVersion : result.version)

export const readingOf = (result: FilmReadingSaved): StoredFilmReading | null => (result.kind === 'saved' ? result.reading : null)
