import type { z } from 'zod'
import { importFilmReadings, type FilmImportMapping } from '#shared/contracts/film-imports.ts'
import { problemSchema } from '#shared/contracts/error.ts'
import { ApiError, OfflineError, addressOf } from './call.ts'
import { csrfToken } from './csrf.ts'

type ImportAnswer = z.infer<NonNullable<typeof importFilmReadings.response>>

export interface ImportUpload {
  readonly shopId: string
  readonly studyId: string
  /** Made by us: sending the same batch again changes nothing. */
  readonly batchId: string
  readonly file: File
  readonly mapping: FilmImportMapping
  readonly header: readonly string[]
}

/** Longest file name that the contract takes. */
const nameCharactersMax = 200

/**
 * Sends the file itself, with progress: `fetch` cannot tell how much of a body has gone.
 *
 * @throws {ApiError} with what to mend
 * @throws {OfflineError} when there is no answer; the same batch may then be sent again
 */
export async function uploadFilmImport(upload: ImportUpload, progress: (share: number) => void): Promise<ImportAnswer> {
  const { shopId, studyId, batchId, file, mapping, header } = upload
  const address = addressOf(importFilmReadings, { shopId, studyId, batchId }, {
    fileName: file.name.slice(-nameCharactersMax), mapping: JSON.stringify(mapping), ...(mapping.headerRows > 0 ? { header: JSON.stringify(header.map(cell => cell.slice(0, 500))) } : {}),
  })
  const token = await csrfToken()
  const text = await new Promise<{ status: number; body: string }>((resolve, reject) => {
    const request = new XMLHttpRequest()
    request.open('PUT', address)
    request.setRequestHeader('Content-Type', 'text/csv')
    request.setRequestHeader('Accept', 'application/json')
    request.setRequestHeader('X-CSRF-Token', token)
    request.upload.onprogress = event => progress(event.lengthComputable ? event.loaded / event.total : 0)
    request.onload = () => resolve({ status: request.status, body: request.responseText })
    request.onerror = () => reject(new OfflineError(null))
    request.ontimeout = () => reject(new OfflineError(null))
    request.send(file)
  })
  const answer: unknown = JSON.parse(text.body === '' ? 'null' : text.body)
  if (text.status >= 200 && text.status < 300 && importFilmReadings.response !== undefined) return importFilmReadings.response.parse(answer)
  const problem = problemSchema.safeParse(answer)
  if (problem.success) throw new ApiError(problem.data)
  throw new OfflineError(null)
}
