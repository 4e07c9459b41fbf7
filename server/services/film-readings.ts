import { z } from 'zod'
import { filmReadingRevisionSchema, type FilmReadingSave, type FilmReadingSaved, type StoredFilmReading } from '#shared/contracts/film.ts'
import type { Executor } from '../dependencies.ts'
import { AppError, notFound } from '../errors.ts'
import {
  countReadings, findIdsElsewhere, insertReadings, keepReadingRevisions, listReadingRevisions, listReadings, lockStudyForReadings,
  raiseReadingsRevision, readReadingsById, readReadingsInCells, readReadingsRevision, updateReadings, vacateCells,
  type LockedStudy, type ReadingRow, type StudyKey,
} from '../repositories/film-readings.ts'
import type { ShopActor } from './actor.ts'
import { decideSaves } from './film-reading-saves.ts'

const cursorSchema = z.tuple([z.number(), z.number().int()])

function decodeCursor(cursor: string | undefined): { exposure: number; replicate: number } | null {
  if (cursor === undefined) return null
  try {
    const [exposure, replicate] = cursorSchema.parse(JSON.parse(Buffer.from(cursor, 'base64url').toString('utf8')))
    return { exposure, replicate }
  } catch {
    throw new AppError('bad-request', { detail: 'This cursor was not made by this list. Start from the first page.' })
  }
}

/** A page of the study's readings, in the order of the entry grid. */
export async function pageOfReadings(database: Executor, key: StudyKey, page: { cursor?: string | undefined; limit: number }) {
  const after = decodeCursor(page.cursor)
  const readingsRevision = await readReadingsRevision(database, key)
  if (readingsRevision === null) throw notFound('study')
  const rows = await listReadings(database, key, { after, limit: page.limit + 1 })
  const items = rows.slice(0, page.limit)
  const last = items.at(-1)
  const nextCursor = rows.length > page.limit && last !== undefined ? Buffer.from(JSON.stringify([last.exposure, last.replicate])).toString('base64url') : null
  return { items: [...items], nextCursor, total: await countReadings(database, key), readingsRevision }
}

/** Every live reading of a study; an export leaves nothing out. */
export async function allReadings(database: Executor, key: StudyKey): Promise<readonly StoredFilmReading[]> {
  const found: ReadingRow[] = []
  for (let after: { exposure: number; replicate: number } | null = null; ;) {
    const rows = await listReadings(database, key, { after, limit: 20_000 })
    found.push(...rows)
    const last = rows.at(-1)
    if (rows.length < 20_000 || last === undefined) return found
    after = { exposure: last.exposure, replicate: last.replicate }
  }
}

/** Takes the study's lock, or says why its readings cannot change. */
export async function lockOpenStudy(transaction: Executor, key: StudyKey): Promise<LockedStudy> {
  const study = await lockStudyForReadings(transaction, key)
  if (study === null) throw notFound('study')
  if (study.retired) throw new AppError('conflict', { detail: 'This study is retired. Restore it before changing its readings.' })
  return study
}

/** Cells of one id in separate rounds: the second change of a cell stands on the first. */
function rounds(cells: readonly FilmReadingSave[]): readonly (readonly number[])[] {
  const turns = new Map<string, number>()
  const result: number[][] = []
  cells.forEach((cell, i) => {
    const turn = turns.get(cell.id) ?? 0
    turns.set(cell.id, turn + 1)
    const round = (result[turn] ??= [])
    round.push(i)
  })
  return result
}

async function saveRound(transaction: Executor, key: StudyKey, cells: readonly FilmReadingSave[], actor: ShopActor): Promise<{ results: readonly FilmReadingSaved[]; changed: boolean }> {
  const ids = cells.map(cell => cell.id)
  const byId = new Map((await readReadingsById(transaction, key, ids)).map(row => [row.id, row]))
  const unknown = ids.filter(id => !byId.has(id))
  const elsewhere = unknown.length === 0 ? new Set<string>() : await findIdsElsewhere(transaction, key, unknown)
  const inCells = await readReadingsInCells(transaction, key, cells)
  const verdicts = decideSaves(cells, { byId, inCells, elsewhere, actorUserId: actor.userId })

  const updates = cells.filter((_, i) => verdicts[i]?.kind === 'update')
  const inserts = cells.filter((_, i) => verdicts[i]?.kind === 'insert')
  if (updates.length > 0) {
    await keepReadingRevisions(transaction, key, { ids: updates.map(cell => cell.id), changedByUserId: actor.userId })
    const moving = updates.filter(cell => {
      const row = byId.get(cell.id)
      return row !== undefined && !row.withdrawn && (row.exposure !== cell.exposure || row.replicate !== cell.replicate)
    })
    if (moving.length > 0) await vacateCells(transaction, key, moving.map(cell => cell.id))
    await updateReadings(transaction, key, updates)
  }
  if (inserts.length > 0) await insertReadings(transaction, key, { cells: inserts, enteredByUserId: actor.userId })

  const occupants = verdicts.flatMap(verdict => (verdict.kind === 'occupied' ? [verdict.by] : []))
  const written = [...updates, ...inserts].map(cell => cell.id)
  const after = new Map((await readReadingsById(transaction, key, [...new Set([...written, ...occupants])])).map(row => [row.id, row]))
  const results = cells.map((cell, i) => {
    const verdict = verdicts[i]
    if (verdict?.kind === 'stale') return staleResult(cell.id, verdict.row)
    if (verdict?.kind === 'occupied') return staleResult(cell.id, after.get(verdict.by) ?? null)
    return savedResult(verdict?.kind === 'same' ? verdict.row : after.get(cell.id))
  })
  return { results, changed: written.length > 0 }
}

function savedResult(row: ReadingRow | undefined): FilmReadingSaved {
  if (row === undefined) throw new Error('a saved reading was not found again')
  return row.withdrawn ? { kind: 'withdrawn', id: row.id, version: row.version } : { kind: 'saved', id: row.id, reading: row }
}

const staleResult = (id: string, row: ReadingRow | null): FilmReadingSaved => ({
  kind: 'stale',
  id,
  // A withdrawn reading has no place in the grid: null with its version says so.
  current: row === null || row.withdrawn ? null : row,
  currentVersion: row?.version ?? 0,
})

/**
 * Saves cells of the entry grid in one transaction; each cell answers for itself, and one that cannot be saved leaves the
 * others alone. Sending the same save again changes nothing and gets the same answers.
 */
export async function saveReadings(database: Executor, key: StudyKey, given: readonly FilmReadingSave[], actor: ShopActor) {
  // The database writes ids in lower case; a client may not.
  const cells = given.map(cell => ({ ...cell, id: cell.id.toLowerCase() }))
  return database.transaction(async transaction => {
    const study = await lockOpenStudy(transaction, key)
    const results: FilmReadingSaved[] = []
    let changed = false
    for (const round of rounds(cells)) {
      const outcome = await saveRound(transaction, key, round.flatMap(i => cells[i] ?? []), actor)
      changed ||= outcome.changed
      round.forEach((i, k) => {
        const result = outcome.results[k]
        if (result !== undefined) results[i] = result
      })
    }
    return { results, readingsRevision: changed ? await raiseReadingsRevision(transaction, key) : study.readingsRevision }
  })
}

/** The former values of a reading, newest first. */
export async function historyOfReading(database: Executor, key: StudyKey, readingId: string) {
  const [reading] = await readReadingsById(database, key, [readingId])
  if (reading === undefined) throw notFound('reading')
  const items = await listReadingRevisions(database, key, readingId)
  return { items: items.map(item => filmReadingRevisionSchema.parse(item)) }
}
