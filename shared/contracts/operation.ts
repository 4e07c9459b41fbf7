import type { z } from 'zod'

export type HttpMethod = 'get' | 'post' | 'put' | 'patch' | 'delete'

/**
 * One thing the API can do: the only description of its request and response.
 *
 * The server binds a handler to it and parses the request with it; the client calls it and parses the
 * response with it; the OpenAPI document is generated from it.
 *
 * `versioned: true` means the call carries `If-Match: "<version>"` and is refused with `stale-edit` when the
 * thing has moved on. `retrySafe: true` means a create that takes an `Idempotency-Key`.
 */
export interface Operation<
  Params extends z.ZodType = z.ZodType,
  Query extends z.ZodType = z.ZodType,
  Body extends z.ZodType = z.ZodType,
  Response extends z.ZodType = z.ZodType,
> {
  readonly id: string
  readonly method: HttpMethod
  /** Express path: `/api/shops/:shopId/printers`. */
  readonly path: string
  readonly summary: string
  readonly params?: Params
  readonly query?: Query
  readonly body?: Body
  /** Absent: answers 204, or streams a file (see `produces`). */
  readonly response?: Response
  readonly status: 200 | 201 | 202 | 204
  readonly versioned?: boolean
  readonly retrySafe?: boolean
  /** Media type of a streamed answer, such as text/csv. */
  readonly produces?: string
  /** Media type of a raw request body that the handler reads as a stream. */
  readonly consumes?: string
}

/** Keeps the exact schema types of one operation. */
export function operation<
  Params extends z.ZodType = z.ZodNever,
  Query extends z.ZodType = z.ZodNever,
  Body extends z.ZodType = z.ZodNever,
  Response extends z.ZodType = z.ZodNever,
>(definition: Operation<Params, Query, Body, Response>): Operation<Params, Query, Body, Response> {
  return definition
}

type Parsed<Schema> = Schema extends z.ZodNever ? undefined : Schema extends z.ZodType ? z.output<Schema> : undefined
type Given<Schema> = Schema extends z.ZodNever ? undefined : Schema extends z.ZodType ? z.input<Schema> : undefined

export type OperationParams<O> = O extends Operation<infer P, infer _Q, infer _B, infer _R> ? Parsed<P> : never
export type OperationQuery<O> = O extends Operation<infer _P, infer Q, infer _B, infer _R> ? Parsed<Q> : never
export type OperationBody<O> = O extends Operation<infer _P, infer _Q, infer B, infer _R> ? Parsed<B> : never
export type OperationResponse<O> = O extends Operation<infer _P, infer _Q, infer _B, infer R> ? Parsed<R> : never
export type OperationParamsInput<O> = O extends Operation<infer P, infer _Q, infer _B, infer _R> ? Given<P> : never
export type OperationQueryInput<O> = O extends Operation<infer _P, infer Q, infer _B, infer _R> ? Given<Q> : never
export type OperationBodyInput<O> = O extends Operation<infer _P, infer _Q, infer B, infer _R> ? Given<B> : never
