import { pipeline } from 'node:stream/promises'
import { Readable } from 'node:stream'
import { and, desc, eq, isNull, sql } from 'drizzle-orm'
import { drizzle } from 'drizzle-orm/node-postgres'
import type pg from 'pg'
import { from as copyFrom } from 'pg-copy-streams'
import * as schema from '#db/schema/index.ts'
import { filmReading, importBatch, importMapping, user } from '#db/schema/index.ts'
import type { FilmImportMapping, ImportBatch, RejectedRow } from '#shared/contracts/film-imports.ts'
import type { Executor } from '../dependencies.ts'
import type { StudyKey } from './film-readings.ts'
import { readingAsJson } from './film-readings.ts'

export interface ReadingToCopy {
  readonly id: string
  readonly exposure: number
  readonly exposureText: string
  readonly replicate: number
  readonly depthMicrometres: number | null
  readonly depthText: string
  readonly standardUncertaintyMicrometres: number | null
  readonly state: string
  readonly exclusionReason: string | null
  readonly note: string
}

export interface CopyTransaction {
  readonly executor: Executor
  /** Writes readings of one batch by COPY: many thousands in one statement. */
  copyReadings(key: StudyKey, batch: { readonly batchId: string; readonly enteredByUserId: string }, readings: Iterable<ReadingToCopy>): Promise<void>
}

const special: Readonly<Record<string, string>> = { '\\': '\\\\', '\t': '\\t', '\n': '\\n', '\r': '\\r' }
/** A value in COPY's text format. */
const copyText = (value: string | number | null) =>
  value === null ? '\\N' : typeof value === 'number' ? String(value) : value.replace(/[\\\t\n\r]/g, character => special[character] ?? character)

function* copyLines(key: StudyKey, batch: { batchId: string; enteredByUserId: string }, readings: Iterable<ReadingToCopy>): Generator<string> {
  const constant = [key.shopId, key.studyId, batch.batchId, batch.enteredByUserId].join('\t')
  let lines = ''
  for (const r of readings) {
    const values = [r.id, r.exposure, r.exposureText, r.replicate, r.depthMicrometres, r.depthText, r.standardUncertaintyMicrometres, r.state, r.exclusionReason, r.note]
    lines += `${values.map(copyText).join('\t')}\t${constant}\n`
    if (lines.length > 65_536) {
      yield lines
      lines = ''
    }
  }
  if (lines !== '') yield lines
}

/**
 * Runs work in a transaction on a connection that can COPY. A failure rolls everything back; a connection that broke is
 * thrown away.
 */
export async function inCopyTransaction<Result>(pool: pg.Pool, work: (transaction: CopyTransaction) => Promise<Result>): Promise<Result> {
  const client = await pool.connect()
  let broken: Error | undefined
  try {
    await client.query('begin')
    const result = await work({
      executor: drizzle(client, { schema }),
      async copyReadings(key, batch, readings) {
        const copy = client.query(copyFrom(`copy film_reading (id, exposure, exposure_text, replicate, depth_micrometres, depth_text,
          standard_uncertainty_micrometres, state, exclusion_reason, note, shop_id, study_id, import_batch_id, entered_by_user_id) from stdin`))
        await pipeline(Readable.from(copyLines(key, batch, readings)), copy)
      },
    })
    await client.query('commit')
    return result
  } catch (error) {
    await client.query('rollback').catch((cause: unknown) => {
      broken = cause instanceof Error ? cause : new Error('rollback failed')
    })
    throw error
  } finally {
    client.release(broken)
  }
}

/** The last filled column of every exposure of the study. */
export async function readLastColumns(database: Executor, key: StudyKey): Promise<ReadonlyMap<number, number>> {
  const rows = await database
    .select({ exposure: filmReading.exposure, last: sql<number>`max(${filmReading.replicate})` })
    .from(filmReading)
    .where(and(eq(filmReading.shopId, key.shopId), eq(filmReading.studyId, key.studyId), isNull(filmReading.withdrawnAt)))
    .groupBy(filmReading.exposure)
  return new Map(rows.map(row => [row.exposure, row.last]))
}

const batchColumns = {
  id: importBatch.id,
  studyId: importBatch.studyId,
  fileName: importBatch.fileName,
  acceptedRows: importBatch.acceptedRows,
  rejectedRows: importBatch.rejectedRows,
  importedByName: user.displayName,
  importedAt: importBatch.importedAt,
  withdrawnAt: importBatch.withdrawnAt,
}
const selectBatches = (database: Executor) =>
  database.select(batchColumns).from(importBatch).leftJoin(user, eq(user.id, importBatch.importedByUserId))

type SelectedBatch = Awaited<ReturnType<typeof selectBatches>>[number]
const asBatch = ({ importedByName, importedAt, withdrawnAt, id, fileName, acceptedRows, rejectedRows }: SelectedBatch): ImportBatch => ({
  id, fileName, acceptedRows, rejectedRows,
  importedBy: importedByName ?? 'a former member',
  importedAt: importedAt.toISOString(),
  withdrawnAt: withdrawnAt?.toISOString() ?? null,
})
const ofBatch = (key: StudyKey, batchId: string) =>
  and(eq(importBatch.shopId, key.shopId), eq(importBatch.studyId, key.studyId), eq(importBatch.id, batchId))

export async function readBatch(database: Executor, key: StudyKey, batchId: string): Promise<ImportBatch | null> {
  const [row] = await selectBatches(database).where(ofBatch(key, batchId))
  return row === undefined ? null : asBatch(row)
}

export async function listBatches(database: Executor, key: StudyKey): Promise<readonly ImportBatch[]> {
  const rows = await selectBatches(database)
    .where(and(eq(importBatch.shopId, key.shopId), eq(importBatch.studyId, key.studyId)))
    .orderBy(desc(importBatch.importedAt), desc(importBatch.id))
  return rows.map(asBatch)
}

/** What the rejected rows' CSV needs: jsonb as stored, parsed by the caller. */
export async function readBatchRows(database: Executor, key: StudyKey, batchId: string) {
  const [row] = await database
    .select({ fileName: importBatch.fileName, rejectedRows: importBatch.rejectedRows, rejected: importBatch.rejected, header: importBatch.header, mapping: importBatch.mapping })
    .from(importBatch)
    .where(ofBatch(key, batchId))
  return row ?? null
}

export interface NewBatch {
  readonly id: string
  readonly fileName: string
  readonly mapping: FilmImportMapping
  readonly acceptedRows: number
  readonly rejectedRows: number
  readonly rejected: readonly RejectedRow[]
  readonly header: readonly string[]
  readonly importedByUserId: string
}

/** False where the id is taken, by whatever study. */
export async function insertBatch(transaction: Executor, key: StudyKey, batch: NewBatch): Promise<boolean> {
  const rows = await transaction
    .insert(importBatch)
    .values({ ...batch, shopId: key.shopId, studyId: key.studyId })
    .onConflictDoNothing({ target: importBatch.id })
    .returning({ id: importBatch.id })
  return rows.length === 1
}

/** Withdraws every live reading of the batch and keeps what stood there. Returns how many. */
export async function withdrawBatch(transaction: Executor, key: StudyKey, change: { readonly batchId: string; readonly changedByUserId: string }): Promise<number> {
  const { batchId, changedByUserId } = change
  await transaction.execute(sql`
    insert into film_reading_revision (reading_id, version, shop_id, before, changed_by_user_id)
    select id, version, shop_id, ${readingAsJson}, ${changedByUserId}::uuid from film_reading
    where import_batch_id = ${batchId} and shop_id = ${key.shopId} and study_id = ${key.studyId} and withdrawn_at is null`)
  const readings = await transaction.execute(sql`
    update film_reading set withdrawn_at = now(), updated_at = now(), version = version + 1
    where import_batch_id = ${batchId} and shop_id = ${key.shopId} and study_id = ${key.studyId} and withdrawn_at is null`)
  // The same now() as the readings': restoring takes back those and no others.
  await transaction.update(importBatch).set({ withdrawnAt: sql`now()` }).where(ofBatch(key, batchId))
  return readings.rowCount ?? 0
}

/**
 * Restores what the withdrawal of the batch took out; a reading whose cell was filled meanwhile moves behind the last
 * filled column of its exposure. Returns how many came back.
 */
export async function restoreBatch(transaction: Executor, key: StudyKey, change: { readonly batchId: string; readonly changedByUserId: string }): Promise<number> {
  const { batchId, changedByUserId } = change
  const ofThisWithdrawal = sql`import_batch_id = ${batchId} and shop_id = ${key.shopId} and study_id = ${key.studyId}
    and withdrawn_at = (select withdrawn_at from import_batch where id = ${batchId})`
  await transaction.execute(sql`
    insert into film_reading_revision (reading_id, version, shop_id, before, changed_by_user_id)
    select id, version, shop_id, ${readingAsJson}, ${changedByUserId}::uuid from film_reading where ${ofThisWithdrawal}`)
  const restored = await transaction.execute(sql`
    with coming as (
      select r.id, r.exposure, r.replicate, exists (
        select 1 from film_reading o
        where o.study_id = r.study_id and o.withdrawn_at is null and o.exposure = r.exposure and o.replicate = r.replicate
      ) or row_number() over (partition by r.exposure, r.replicate order by r.id) > 1 as taken
      from (select * from film_reading where ${ofThisWithdrawal}) r
    ), placed as (
      -- Looked up cell by cell rather than joined: there are no statistics yet for what was just imported.
      select id, case when taken
        then greatest(
          max(replicate) over (partition by exposure),
          (select max(replicate) from film_reading o where o.study_id = ${key.studyId} and o.withdrawn_at is null and o.exposure = coming.exposure)
        ) + (row_number() over (partition by exposure, taken order by replicate, id))::int
        else replicate end as replicate
      from coming
    )
    update film_reading r set replicate = placed.replicate, withdrawn_at = null, updated_at = now(), version = r.version + 1
    from placed where r.id = placed.id`)
  await transaction.update(importBatch).set({ withdrawnAt: null }).where(ofBatch(key, batchId))
  return restored.rowCount ?? 0
}

export async function keepMapping(transaction: Executor, entry: { readonly shopId: string; readonly headerHash: string; readonly mapping: FilmImportMapping }): Promise<void> {
  await transaction
    .insert(importMapping)
    .values(entry)
    .onConflictDoUpdate({ target: [importMapping.shopId, importMapping.headerHash], set: { mapping: entry.mapping, updatedAt: sql`now()` } })
}

export async function readMapping(database: Executor, shopId: string, headerHash: string): Promise<unknown> {
  const [row] = await database
    .select({ mapping: importMapping.mapping })
    .from(importMapping)
    .where(and(eq(importMapping.shopId, shopId), eq(importMapping.headerHash, headerHash)))
  return row?.mapping ?? null
}
