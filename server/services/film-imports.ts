import { createHash } from 'node:crypto'
import { z } from 'zod'
import { filmImportMappingSchema, rejectedRowSchema, type FilmImportMapping, type ImportBatch } from '#shared/contracts/film-imports.ts'
import { headerSignature, mappingProblem, toCsv } from '#shared/imports/index.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError, notFound } from '../errors.ts'
import { recordAudit } from '../repositories/audit.ts'
import {
  inCopyTransaction, insertBatch, keepMapping, listBatches, readBatch, readBatchRows, readLastColumns, readMapping, restoreBatch, withdrawBatch,
  type ReadingToCopy,
} from '../repositories/film-imports.ts'
import { raiseReadingsRevision, readReadingsRevision, type StudyKey } from '../repositories/film-readings.ts'
import type { ShopActor } from './actor.ts'
import { parseImport, refuseImport, rejectedRowsKeptMax, type ParsedImport } from './film-import-parse.ts'
import { assignReplicates } from './film-import-replicates.ts'
import { lockOpenStudy } from './film-readings.ts'

/** Most films of one exposure that the entry grid can hold (contract film.ts). */
const replicateMax = 100_000

/** Columns that the file of rejected rows has behind the columns of the original, so that the mapping still fits. */
const rejectedColumns = ['line', 'why_rejected'] as const

export interface ImportCall {
  readonly key: StudyKey
  readonly batchId: string
  readonly fileName: string
  /** JSON, not yet checked. */
  readonly mapping: string
  readonly header: string | undefined
  readonly body: AsyncIterable<Uint8Array>
  readonly actor: ShopActor
}

function parseJson(text: string, field: string): unknown {
  try {
    return JSON.parse(text)
  } catch {
    throw new AppError('validation-failed', { detail: `${field}: is not JSON.`, fields: [{ path: `query.${field}`, sentence: 'Is not JSON.' }] })
  }
}

function parseField<Schema extends z.ZodType>(schema: Schema, text: string, field: string): z.output<Schema> {
  const parsed = schema.safeParse(parseJson(text, field))
  if (parsed.success) return parsed.data
  const fields = parsed.error.issues.slice(0, 20).map(issue => ({ path: ['query', field, ...issue.path.map(String)].join('.'), sentence: issue.message }))
  throw new AppError('validation-failed', { detail: `The ${field} of the import is not usable: ${fields[0]?.path ?? ''}: ${fields[0]?.sentence ?? ''}`, fields })
}

const headerSchema = z.array(z.string().max(500)).max(500)
const hashOf = (header: readonly string[]) => createHash('sha256').update(headerSignature(header)).digest('hex')

function headerOfRejected(header: readonly string[], width: number): readonly string[] {
  const names = Array.from({ length: Math.max(header.length, width) }, (_, i) => header[i] ?? (header.length === 0 ? `column_${i + 1}` : ''))
  return [...names, ...rejectedColumns]
}

const widthOf = (rows: readonly { readonly cells: readonly string[] }[]) => rows.reduce((width, row) => Math.max(width, row.cells.length), 0)

/** The mapping is kept for the file's header and, where rows were rejected, for the file that gives them back. */
async function rememberMapping(transaction: Executor, shopId: string, mapping: FilmImportMapping, headers: { given: readonly string[] | null; parsed: ParsedImport }): Promise<void> {
  const { given, parsed } = headers
  const entries = new Map<string, FilmImportMapping>()
  if (mapping.headerRows > 0) entries.set(hashOf(parsed.header), mapping)
  if (given !== null && given.length > 0) entries.set(hashOf(given), mapping)
  if (parsed.rejected.length > 0) {
    entries.set(hashOf(headerOfRejected(parsed.header, widthOf(parsed.rejected))), { ...mapping, encoding: 'utf-8', headerRows: 1 })
  }
  // Always in one order: two imports that remember the same headers must not wait for each other.
  for (const [headerHash, kept] of [...entries].sort(([a], [b]) => (a < b ? -1 : 1))) {
    await keepMapping(transaction, { shopId, headerHash, mapping: kept })
  }
}

async function alreadyImported(database: Executor, call: ImportCall, readingsRevision: number) {
  const batch = await readBatch(database, call.key, call.batchId)
  if (batch === null) return null
  const rows = await readBatchRows(database, call.key, call.batchId)
  return { batch, rejected: z.array(rejectedRowSchema).parse(rows?.rejected ?? []), alreadyImported: true, readingsRevision }
}

function* readingsToCopy(parsed: ParsedImport, columns: Int32Array, newId: () => string): Generator<ReadingToCopy> {
  for (const [i, reading] of parsed.readings.entries()) {
    yield { ...reading, id: newId(), replicate: columns[i] ?? 0 }
  }
}

/**
 * Imports a CSV file into a study: the upload is read and checked whole, then its good rows go in by COPY in one
 * transaction together with the batch that names them. The same batch id again, even at the same moment, answers what the
 * first did.
 *
 * @throws {AppError} `import-refused` with what to mend; nothing is written then
 */
export async function importReadings(dependencies: Pick<Dependencies, 'database' | 'pool' | 'newId'>, call: ImportCall) {
  const { key, batchId, actor } = call
  const mapping = parseField(filmImportMappingSchema, call.mapping, 'mapping')
  const givenHeader = call.header === undefined ? null : parseField(headerSchema, call.header, 'header')
  const before = await readReadingsRevision(dependencies.database, key)
  if (before === null) throw notFound('study')
  const former = await alreadyImported(dependencies.database, call, before)
  if (former !== null) return former
  const parsed = await parseImport(call.body, mapping)

  return inCopyTransaction(dependencies.pool, async ({ executor, copyReadings }) => {
    const study = await lockOpenStudy(executor, key)
    const meanwhile = await alreadyImported(executor, call, study.readingsRevision)
    if (meanwhile !== null) return meanwhile
    const problem = mappingProblem(mapping, study.exposureKind)
    if (problem !== null) throw refuseImport(problem)

    const columns = assignReplicates(parsed.readings, await readLastColumns(executor, key))
    if (columns.some(column => column > replicateMax)) {
      throw refuseImport(`One exposure would have more than ${replicateMax} films: is the exposure column the right one?`)
    }
    const isNew = await insertBatch(executor, key, {
      id: batchId, fileName: call.fileName, mapping, importedByUserId: actor.userId,
      acceptedRows: parsed.readings.length, rejectedRows: parsed.rejectedRows, rejected: parsed.rejected, header: parsed.header,
    })
    if (!isNew) throw new AppError('conflict', { detail: 'This import id belongs to another import. Choose the file again; nothing was imported.' })
    await copyReadings(key, { batchId, enteredByUserId: actor.userId }, readingsToCopy(parsed, columns, dependencies.newId))
    await recordAudit(executor, {
      id: dependencies.newId(), shopId: key.shopId, actorUserId: actor.userId, action: 'imported', thing: 'film import', thingId: batchId,
      after: { studyId: key.studyId, fileName: call.fileName, acceptedRows: parsed.readings.length, rejectedRows: parsed.rejectedRows },
    })
    await rememberMapping(executor, key.shopId, mapping, { given: givenHeader, parsed })
    const batch = await readBatch(executor, key, batchId)
    if (batch === null) throw new Error('a stored import was not found again')
    const readingsRevision = parsed.readings.length > 0 ? await raiseReadingsRevision(executor, key) : study.readingsRevision
    return { batch, rejected: [...parsed.rejected], alreadyImported: false, readingsRevision }
  })
}

export async function importsOfStudy(database: Executor, key: StudyKey): Promise<{ items: ImportBatch[] }> {
  if ((await readReadingsRevision(database, key)) === null) throw notFound('study')
  return { items: [...(await listBatches(database, key))] }
}

/** The rejected rows as CSV with the file's own columns and delimiter, and behind them the line and the reasons. */
export async function rejectedRowsCsv(database: Executor, key: StudyKey, batchId: string): Promise<{ csv: string; fileName: string }> {
  const stored = await readBatchRows(database, key, batchId)
  if (stored === null) throw notFound('import')
  const rows = z.array(rejectedRowSchema).parse(stored.rejected)
  const { delimiter } = filmImportMappingSchema.parse(stored.mapping)
  const header = headerOfRejected(z.array(z.string()).parse(stored.header), widthOf(rows))
  const width = header.length - rejectedColumns.length
  const body = rows.map(row => [...Array.from({ length: width }, (_, i) => row.cells[i] ?? ''), String(row.line), row.reasons.join(' ')])
  const missing = stored.rejectedRows - rows.length
  const remark = missing === 0 ? [] : [[...Array.from({ length: width + 1 }, () => ''), `${missing} more rejected rows are not kept (at most ${rejectedRowsKeptMax} are): mend these and import the original again to see the rest.`]]
  return { csv: toCsv([header, ...body, ...remark], { delimiter }), fileName: stored.fileName }
}

interface BatchChange {
  readonly key: StudyKey
  readonly batchId: string
  readonly actor: ShopActor
}

async function changeBatch({ database, newId }: Pick<Dependencies, 'database' | 'newId'>, call: BatchChange & { readonly withdrawn: boolean }) {
  const { key, batchId, actor, withdrawn } = call
  return database.transaction(async transaction => {
    const study = await lockOpenStudy(transaction, key)
    const batch = await readBatch(transaction, key, batchId)
    if (batch === null) throw notFound('import')
    // Asked for twice: it stands as asked.
    if ((batch.withdrawnAt !== null) === withdrawn) return { batch, readingsRevision: study.readingsRevision }
    const readings = await (withdrawn ? withdrawBatch : restoreBatch)(transaction, key, { batchId, changedByUserId: actor.userId })
    await recordAudit(transaction, {
      id: newId(), shopId: key.shopId, actorUserId: actor.userId, action: withdrawn ? 'withdrawn' : 'restored', thing: 'film import', thingId: batchId,
      after: { studyId: key.studyId, readings },
    })
    const readingsRevision = await raiseReadingsRevision(transaction, key)
    const after = await readBatch(transaction, key, batchId)
    if (after === null) throw new Error('a stored import was not found again')
    return { batch: after, readingsRevision }
  })
}

/** Withdraws every reading that the import brought; they can be restored. */
export const withdrawImport = (dependencies: Pick<Dependencies, 'database' | 'newId'>, change: BatchChange) =>
  changeBatch(dependencies, { ...change, withdrawn: true })

/** Restores a withdrawn import; readings whose place was taken meanwhile move to the end of their exposure. */
export const restoreImport = (dependencies: Pick<Dependencies, 'database' | 'newId'>, change: BatchChange) =>
  changeBatch(dependencies, { ...change, withdrawn: false })

/** The mapping that a person of the shop chose for this header before, or null. */
export async function findMapping(database: Executor, shopId: string, header: readonly string[]): Promise<FilmImportMapping | null> {
  const stored = await readMapping(database, shopId, hashOf(header))
  const parsed = filmImportMappingSchema.safeParse(stored)
  return parsed.success ? parsed.data : null
}
