import type { ErrorCode, FieldProblem } from '#shared/contracts/error.ts'

/** A refusal that a person can act on; the status follows from the code. */
export class AppError extends Error {
  readonly code: ErrorCode
  readonly fields: readonly FieldProblem[] | undefined
  readonly current: unknown
  readonly retryAfterSeconds: number | undefined

  constructor(
    code: ErrorCode,
    options: { detail: string; fields?: readonly FieldProblem[]; current?: unknown; retryAfterSeconds?: number; cause?: unknown },
  ) {
    super(options.detail, { cause: options.cause })
    this.name = 'AppError'
    this.code = code
    this.fields = options.fields
    this.current = options.current
    this.retryAfterSeconds = options.retryAfterSeconds
  }
}

/** Same answer for "does not exist" and "belongs to another shop". */
export function notFound(thing: string): AppError {
  return new AppError('not-found', { detail: `There is no such ${thing} in this shop.` })
}

/** Somebody else saved first: carries the thing as it stands, so that both versions can be shown. */
export function staleEdit(thing: string, current: unknown): AppError {
  return new AppError('stale-edit', {
    detail: `This ${thing} was changed by somebody else meanwhile. Nothing was overwritten; compare both versions.`,
    current,
  })
}
