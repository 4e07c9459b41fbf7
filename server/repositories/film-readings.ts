import { and, asc, desc, eq, gt, inArray, isNull, or, sql } from 'drizzle-orm'
import { filmReading, filmReadingRevision, study, user } from '#db/schema/index.ts'
import type { FilmReadingSave, StoredFilmReading } from '#shared/contracts/film.ts'
import type { Executor } from '../dependencies.ts'

export interface StudyKey {
  readonly shopId: string
  readonly studyId: string
}

/** A reading with what a save must know about it. */
export type ReadingRow = StoredFilmReading & { readonly withdrawn: boolean; readonly enteredByUserId: string | null }

export interface LockedStudy {
  readonly exposureKind: 'seconds' | 'mJ/cm2'
  readonly retired: boolean
  readonly readingsRevision: number
}

const ofStudy = (key: StudyKey) => and(eq(filmReading.shopId, key.shopId), eq(filmReading.studyId, key.studyId))
/**
 * The same check for rows that are found by their ids. Written as a case, so that PostgreSQL neither looks for an index nor
 * guesses how many rows pass: just after a large import it believes that a study has hardly any, and would walk all of
 * them for every id (50 s instead of 0.2 s for 2000 cells beside 100,000 imported ones).
 */
const checkedStudy = (key: StudyKey) =>
  sql`case when film_reading.shop_id = ${key.shopId}::uuid and film_reading.study_id = ${key.studyId}::uuid then true else false end`
const withIds = (ids: readonly string[]) => sql`film_reading.id = any(${sql.param(ids)}::uuid[])`
const live = isNull(filmReading.withdrawnAt)

/** Shown where the person has left and their account is gone. */
const gone = 'a former member'

const columns = {
  id: filmReading.id,
  exposure: filmReading.exposure,
  exposureText: filmReading.exposureText,
  replicate: filmReading.replicate,
  depthMicrometres: filmReading.depthMicrometres,
  depthText: filmReading.depthText,
  standardUncertaintyMicrometres: filmReading.standardUncertaintyMicrometres,
  state: filmReading.state,
  exclusionReason: filmReading.exclusionReason,
  note: filmReading.note,
  importBatchId: filmReading.importBatchId,
  version: filmReading.version,
  enteredByUserId: filmReading.enteredByUserId,
  enteredByName: user.displayName,
  enteredAt: filmReading.enteredAt,
  updatedAt: filmReading.updatedAt,
  withdrawnAt: filmReading.withdrawnAt,
}

const selectReadings = (database: Executor) =>
  database.select(columns).from(filmReading).leftJoin(user, eq(user.id, filmReading.enteredByUserId))

type Selected = Awaited<ReturnType<typeof selectReadings>>[number]

function asRow({ enteredByName, enteredAt, updatedAt, withdrawnAt, ...rest }: Selected): ReadingRow {
  return { ...rest, enteredBy: enteredByName ?? gone, enteredAt: enteredAt.toISOString(), updatedAt: updatedAt.toISOString(), withdrawn: withdrawnAt !== null }
}

/** Every writer of readings takes this lock first, so that two of them can never wait for each other in a circle. */
export async function lockStudyForReadings(transaction: Executor, key: StudyKey): Promise<LockedStudy | null> {
  const [row] = await transaction
    .select({ exposureKind: study.exposureKind, retiredAt: study.retiredAt, readingsRevision: study.readingsRevision })
    .from(study)
    .where(and(eq(study.shopId, key.shopId), eq(study.id, key.studyId)))
    // Not FOR UPDATE: rows that refer to the study may still be written beside this.
    .for('no key update')
  return row === undefined ? null : { exposureKind: row.exposureKind, retired: row.retiredAt !== null, readingsRevision: row.readingsRevision }
}

/** The version stays: a saved reading must not make somebody's edit of the study's settings stale. */
export async function raiseReadingsRevision(transaction: Executor, key: StudyKey): Promise<number> {
  const [row] = await transaction
    .update(study)
    .set({ readingsRevision: sql`${study.readingsRevision} + 1`, updatedAt: sql`now()` })
    .where(and(eq(study.shopId, key.shopId), eq(study.id, key.studyId)))
    .returning({ readingsRevision: study.readingsRevision })
  if (row === undefined) throw new Error('the study vanished under its lock')
  return row.readingsRevision
}

export async function readReadingsRevision(database: Executor, key: StudyKey): Promise<number | null> {
  const [row] = await database
    .select({ readingsRevision: study.readingsRevision })
    .from(study)
    .where(and(eq(study.shopId, key.shopId), eq(study.id, key.studyId)))
  return row?.readingsRevision ?? null
}

/** The named readings of the study, withdrawn ones too. */
export async function readReadingsById(database: Executor, key: StudyKey, ids: readonly string[]): Promise<readonly ReadingRow[]> {
  if (ids.length === 0) return []
  const rows = await selectReadings(database).where(and(withIds(ids), checkedStudy(key)))
  return rows.map(asRow)
}

/** Which of the ids are taken by readings of another study or shop. */
export async function findIdsElsewhere(database: Executor, key: StudyKey, ids: readonly string[]): Promise<ReadonlySet<string>> {
  const rows = await database
    .select({ id: filmReading.id })
    .from(filmReading)
    .where(and(withIds(ids), sql`not (${checkedStudy(key)})`))
  return new Set(rows.map(row => row.id))
}

/** The readings that stand in the named cells now. */
export async function readReadingsInCells(
  database: Executor,
  key: StudyKey,
  cells: readonly { readonly exposure: number; readonly replicate: number }[],
): Promise<readonly ReadingRow[]> {
  const exposures = sql.param(cells.map(cell => cell.exposure))
  const replicates = sql.param(cells.map(cell => cell.replicate))
  // The limit changes nothing, a cell holds one reading; it makes PostgreSQL look each cell up in the index.
  const found = await database.execute<{ id: string }>(sql`
    select reading.id from unnest(${exposures}::float8[], ${replicates}::int[]) as cell (exposure, replicate)
    cross join lateral (
      select id from film_reading
      where shop_id = ${key.shopId} and study_id = ${key.studyId} and exposure = cell.exposure and replicate = cell.replicate and withdrawn_at is null
      limit 1
    ) reading`)
  return readReadingsById(database, key, found.rows.map(row => row.id))
}

/** A page of readings by exposure and column, beginning after `after`. */
export async function listReadings(
  database: Executor,
  key: StudyKey,
  page: { readonly after: { readonly exposure: number; readonly replicate: number } | null; readonly limit: number },
): Promise<readonly ReadingRow[]> {
  const { after } = page
  const rows = await selectReadings(database)
    .where(and(
      ofStudy(key),
      live,
      after === null
        ? undefined
        : or(gt(filmReading.exposure, after.exposure), and(eq(filmReading.exposure, after.exposure), gt(filmReading.replicate, after.replicate))),
    ))
    .orderBy(asc(filmReading.exposure), asc(filmReading.replicate))
    .limit(page.limit)
  return rows.map(asRow)
}

export async function countReadings(database: Executor, key: StudyKey): Promise<number> {
  return database.$count(filmReading, and(ofStudy(key), live))
}

/** Keeps the present values of the readings before they change: in the same transaction as the change. */
export async function keepReadingRevisions(transaction: Executor, key: StudyKey, change: { readonly ids: readonly string[]; readonly changedByUserId: string }): Promise<void> {
  await transaction.execute(sql`
    insert into film_reading_revision (reading_id, version, shop_id, before, changed_by_user_id)
    select id, version, shop_id, ${readingAsJson}, ${change.changedByUserId}::uuid
    from film_reading
    where ${withIds(change.ids)} and ${checkedStudy(key)}`)
}

/** A reading's fields as the contract names them. */
export const readingAsJson = sql`jsonb_build_object(
  'exposure', exposure, 'exposureText', exposure_text, 'replicate', replicate, 'depthMicrometres', depth_micrometres,
  'depthText', depth_text, 'standardUncertaintyMicrometres', standard_uncertainty_micrometres, 'state', state,
  'exclusionReason', exclusion_reason, 'note', note, 'withdrawn', withdrawn_at is not null)`

/** Takes the readings out of their cells for the moment, so that two readings can change places. */
export async function vacateCells(transaction: Executor, key: StudyKey, ids: readonly string[]): Promise<void> {
  await transaction
    .update(filmReading)
    .set({ withdrawnAt: sql`now()` })
    .where(and(withIds(ids), checkedStudy(key), live))
}

function cellColumns(cells: readonly FilmReadingSave[]) {
  const list = <Value>(pick: (cell: FilmReadingSave) => Value) => sql.param(cells.map(pick))
  return sql`unnest(
    ${list(c => c.id)}::uuid[], ${list(c => c.exposure)}::float8[], ${list(c => c.exposureText)}::text[], ${list(c => c.replicate)}::int[],
    ${list(c => c.depthMicrometres)}::float8[], ${list(c => c.depthText)}::text[], ${list(c => c.standardUncertaintyMicrometres)}::float8[],
    ${list(c => c.state)}::film_reading_state[], ${list(c => c.exclusionReason)}::text[], ${list(c => c.note)}::text[], ${list(c => c.withdrawn)}::boolean[]
  ) as cell (id, exposure, exposure_text, replicate, depth_micrometres, depth_text, standard_uncertainty_micrometres, state, exclusion_reason, note, withdrawn)`
}

export async function updateReadings(transaction: Executor, key: StudyKey, cells: readonly FilmReadingSave[]): Promise<void> {
  await transaction.execute(sql`
    update film_reading set
      exposure = cell.exposure, exposure_text = cell.exposure_text, replicate = cell.replicate,
      depth_micrometres = cell.depth_micrometres, depth_text = cell.depth_text,
      standard_uncertainty_micrometres = cell.standard_uncertainty_micrometres, state = cell.state,
      exclusion_reason = cell.exclusion_reason, note = cell.note, version = film_reading.version + 1, updated_at = now(),
      withdrawn_at = case when cell.withdrawn then coalesce(film_reading.withdrawn_at, now()) end
    from ${cellColumns(cells)}
    where film_reading.id = cell.id and ${checkedStudy(key)}`)
}

export async function insertReadings(
  transaction: Executor,
  key: StudyKey,
  entry: { readonly cells: readonly FilmReadingSave[]; readonly enteredByUserId: string },
): Promise<void> {
  await transaction.execute(sql`
    insert into film_reading (id, shop_id, study_id, exposure, exposure_text, replicate, depth_micrometres, depth_text,
      standard_uncertainty_micrometres, state, exclusion_reason, note, entered_by_user_id, withdrawn_at)
    select id, ${key.shopId}::uuid, ${key.studyId}::uuid, exposure, exposure_text, replicate, depth_micrometres, depth_text,
      standard_uncertainty_micrometres, state, exclusion_reason, note, ${entry.enteredByUserId}::uuid, case when withdrawn then now() end
    from ${cellColumns(entry.cells)}`)
}

/** The former values of one reading, newest first. */
export async function listReadingRevisions(database: Executor, key: StudyKey, readingId: string) {
  const rows = await database
    .select({ version: filmReadingRevision.version, before: filmReadingRevision.before, changedByName: user.displayName, changedAt: filmReadingRevision.changedAt })
    .from(filmReadingRevision)
    .leftJoin(user, eq(user.id, filmReadingRevision.changedByUserId))
    .where(and(
      eq(filmReadingRevision.shopId, key.shopId),
      inArray(filmReadingRevision.readingId, database.select({ id: filmReading.id }).from(filmReading).where(and(ofStudy(key), eq(filmReading.id, readingId)))),
    ))
    .orderBy(desc(filmReadingRevision.version))
  return rows.map(row => ({ version: row.version, before: row.before, changedBy: row.changedByName ?? gone, changedAt: row.changedAt.toISOString() }))
}
