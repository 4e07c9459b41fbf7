import type { ErrorRequestHandler, Request, Response } from 'express'
import type { Logger } from 'pino'
import { errorStatus, type ErrorCode, type Problem } from '#shared/contracts/error.ts'
import { AppError } from '../errors.ts'
import { loggable } from '../loggable.ts'

const titles: Partial<Record<ErrorCode, string>> = {
  'validation-failed': 'Some fields need another value',
  'not-found': 'Not found',
  'stale-edit': 'Changed meanwhile',
  'server-error': 'Something went wrong here',
}

/** Postgres and body-parser errors that are the caller's doing, as refusals. */
function asAppError(error: unknown): AppError | null {
  if (error instanceof AppError) return error
  if (typeof error !== 'object' || error === null) return null
  const type = 'type' in error ? error.type : undefined
  if (type === 'entity.too.large') return new AppError('body-too-large', { detail: 'The request is larger than this call takes.' })
  if (type === 'entity.parse.failed') return new AppError('malformed-body', { detail: 'The request body is not JSON.' })
  if (type === 'charset.unsupported' || type === 'encoding.unsupported') {
    return new AppError('unsupported-media-type', { detail: 'Send JSON in UTF-8.' })
  }
  if (type === 'request.aborted' || type === 'request.size.invalid') {
    return new AppError('bad-request', { detail: 'The request broke off half-way.' })
  }
  if (error instanceof URIError) return new AppError('bad-request', { detail: 'The address is not well-formed.' })
  if (isDatabaseAway(error)) {
    return new AppError('service-unavailable', { detail: 'The database does not answer just now. Nothing was saved; try again in a moment.' })
  }
  const code = postgresCode(error)
  // 22021 and 22P05: a zero byte in a text or in JSON, which PostgreSQL cannot hold.
  if (code === '22021' || code === '22P05') return new AppError('validation-failed', { detail: 'A text holds a character that cannot be stored.' })
  if ('status' in error && error.status === 404) return new AppError('not-found', { detail: 'There is no such file.' })
  // Express' own parts refuse with such a status: a body that is not the gzip it says, a range that does not exist.
  if ('status' in error && typeof error.status === 'number' && error.status >= 400 && error.status < 500) {
    return new AppError('bad-request', { detail: 'The request cannot be read.' })
  }
  return null
}

/** PostgreSQL restarts, is full, or the way to it is cut: nothing that a caller or we did wrong. */
export function isDatabaseAway(error: unknown): boolean {
  const code = postgresCode(error)
  // 57P0x: PostgreSQL shuts down or starts up; 53300: no connection left; 08xxx: connection lost.
  if (code !== null && (/^57P0[123]$/.test(code) || code === '53300' || code.startsWith('08'))) return true
  if (code === 'ECONNREFUSED' || code === 'ECONNRESET' || code === 'EPIPE') return true
  // The driver gives these no code.
  for (let e: unknown = error; e instanceof Error; e = e.cause) {
    if (/^(Connection terminated|timeout exceeded when trying to connect|Client has encountered a connection error)/.test(e.message)) return true
  }
  return false
}

/** The SQLSTATE of an error that Drizzle may have wrapped. */
export function postgresCode(error: unknown): string | null {
  for (let e: unknown = error; typeof e === 'object' && e !== null; e = 'cause' in e ? e.cause : null) {
    if ('code' in e && typeof e.code === 'string' && !(e instanceof AppError)) return e.code
  }
  return null
}

/** The violated constraint of an error that Drizzle may have wrapped. */
export function postgresConstraint(error: unknown): string | null {
  for (let e: unknown = error; typeof e === 'object' && e !== null; e = 'cause' in e ? e.cause : null) {
    if ('constraint' in e && typeof e.constraint === 'string') return e.constraint
  }
  return null
}

export function sendProblem(request: Request, response: Response, error: AppError): void {
  const status = errorStatus[error.code]
  const problem: Problem = {
    type: `/problems/${error.code}`,
    title: titles[error.code] ?? error.code.replaceAll('-', ' ').replace(/^./, c => c.toUpperCase()),
    status,
    code: error.code,
    detail: error.message,
    requestId: String(request.id ?? ''),
    ...(error.fields === undefined ? {} : { fields: [...error.fields] }),
    ...(error.current === undefined ? {} : { current: error.current }),
    ...(error.retryAfterSeconds === undefined ? {} : { retryAfterSeconds: error.retryAfterSeconds }),
  }
  if (error.retryAfterSeconds !== undefined) response.setHeader('Retry-After', String(Math.ceil(error.retryAfterSeconds)))
  response.status(status).type('application/problem+json').send(JSON.stringify(problem))
}

/** Last in the chain: unknown errors are logged whole and answered without inner text. */
export function errorHandler(logger: Logger): ErrorRequestHandler {
  return (error, request, response, next) => {
    if (response.headersSent) {
      next(error)
      return
    }
    const known = asAppError(error)
    if (known === null) logger.error({ err: loggable(error), requestId: request.id }, 'unexpected error')
    sendProblem(
      request,
      response,
      known ?? new AppError('server-error', { detail: `Something went wrong on our side. Nothing you typed is lost; tell the owner this number: ${String(request.id)}` }),
    )
  }
}
