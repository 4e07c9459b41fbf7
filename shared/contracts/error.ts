import { z } from 'zod'

/**
 * Every way an API call can be refused, with its HTTP status.
 * The client matches `code`, never the sentence. One table, kept complete by the compiler.
 */
export const errorStatus = {
  'bad-request': 400,
  'malformed-body': 400,
  'validation-failed': 422,
  'sign-in-required': 401,
  'wrong-credentials': 401,
  'csrf-token-missing': 403,
  'not-allowed': 403,
  'not-found': 404,
  'method-not-allowed': 405,
  conflict: 409,
  'name-taken': 409,
  'last-owner': 409,
  'already-member': 409,
  'idempotency-key-reused': 409,
  'link-not-valid': 410,
  'stale-edit': 412,
  'body-too-large': 413,
  'unsupported-media-type': 415,
  'if-match-required': 428,
  'too-many-requests': 429,
  'import-refused': 422,
  'server-error': 500,
  'service-unavailable': 503,
} as const

export type ErrorCode = keyof typeof errorStatus

/** One field that was refused: where, and what to do about it. */
export const fieldProblemSchema = z.object({
  /** Dotted path from the part of the request: "body.layerHeightMicrometres". */
  path: z.string(),
  sentence: z.string(),
})

/** RFC 9457 problem details, as every refused call answers (`application/problem+json`). */
export const problemSchema = z.object({
  type: z.string(),
  title: z.string(),
  status: z.int(),
  code: z.enum(Object.keys(errorStatus) as [ErrorCode, ...ErrorCode[]]),
  /** A sentence that a person can act on. */
  detail: z.string(),
  requestId: z.string(),
  fields: z.array(fieldProblemSchema).optional(),
  /** stale-edit: the thing as it stands now, so that both versions can be shown. */
  current: z.unknown().optional(),
  /** too-many-requests: when to try again. */
  retryAfterSeconds: z.number().optional(),
})
export type Problem = z.infer<typeof problemSchema>
export type FieldProblem = z.infer<typeof fieldProblemSchema>
