import type { Request } from 'express'
import {
  exportRejectedRows, findImportMapping, importBytesMax, importFilmReadings, listFilmImports, restoreFilmImport, withdrawFilmImport,
} from '#shared/contracts/film-imports.ts'
import { AppError } from '../errors.ts'
import { tooManyBytes } from '../services/film-import-parse.ts'
import { findMapping, importReadings, importsOfStudy, rejectedRowsCsv, restoreImport, withdrawImport } from '../services/film-imports.ts'
import type { Binder } from './binder.ts'
import { sendFile } from './send-file.ts'

function checkUpload(request: Request): void {
  if (!/^text\/csv\b/i.test(request.get('Content-Type') ?? '')) {
    throw new AppError('unsupported-media-type', { detail: 'Send the file as text/csv.' })
  }
  if ((request.get('Content-Encoding') ?? 'identity') !== 'identity') {
    throw new AppError('unsupported-media-type', { detail: 'Send the file as it is, not compressed.' })
  }
  if (Number(request.get('Content-Length') ?? 0) > importBytesMax) throw tooManyBytes()
}

/** How long and how much we go on reading from a sender that has been refused. */
const drainMillisecondsMax = 20_000
const drainBytesMax = 2 * importBytesMax

/** Reads what the sender still sends, so that it gets to read the refusal instead of a broken connection. */
async function drain(request: Request): Promise<void> {
  if (request.readableEnded || request.destroyed) return
  await new Promise<void>(resolve => {
    const timer = setTimeout(resolve, drainMillisecondsMax)
    let bytes = 0
    const done = () => {
      clearTimeout(timer)
      resolve()
    }
    request.on('data', (chunk: Buffer) => {
      bytes += chunk.length
      if (bytes > drainBytesMax) done()
    })
    request.once('end', done).once('close', done).once('error', done)
    request.resume()
  })
}

export function filmImportRoutes(binder: Binder): void {
  const { dependencies } = binder
  binder.implementInShop(importFilmReadings, async ({ params, query, actor, request }) => {
    try {
      checkUpload(request)
      return await importReadings(dependencies, {
        key: params, batchId: params.batchId, fileName: query.fileName, mapping: query.mapping, header: query.header, actor,
        // A refusal half-way must leave the connection open for its own answer.
        body: request.iterator({ destroyOnReturn: false }),
      })
    } catch (error) {
      if (request.destroyed && !request.complete) throw new AppError('bad-request', { detail: 'The upload broke off half-way. Nothing was imported.', cause: error })
      throw error
    } finally {
      await drain(request)
    }
  })
  binder.implementInShop(listFilmImports, ({ params, database }) => importsOfStudy(database, params))
  binder.implementInShop(exportRejectedRows, async ({ params, database, response }) => {
    const { csv, fileName } = await rejectedRowsCsv(database, params, params.batchId)
    sendFile(response, { text: csv, type: 'text/csv', fileName: `rejected rows of ${fileName.replace(/\.[a-z]{1,5}$/i, '')}.csv` })
  })
  binder.implementInShop(withdrawFilmImport, ({ params, actor }) => withdrawImport(dependencies, { key: params, batchId: params.batchId, actor }))
  binder.implementInShop(restoreFilmImport, ({ params, actor }) => restoreImport(dependencies, { key: params, batchId: params.batchId, actor }))
  binder.implementInShop(findImportMapping, async ({ params, body, database }) => ({ mapping: await findMapping(database, params.shopId, body.header) }))
}
