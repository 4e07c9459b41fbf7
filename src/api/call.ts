import type { z } from 'zod'
import { problemSchema, type Problem } from '#shared/contracts/error.ts'
import type {
  Operation, OperationBodyInput, OperationParamsInput, OperationQueryInput, OperationResponse,
} from '#shared/contracts/operation.ts'
import { csrfToken, forgetCsrfToken } from './csrf.ts'

/** The server refused, and said why. */
export class ApiError extends Error {
  constructor(readonly problem: Problem) {
    super(problem.detail)
    this.name = 'ApiError'
  }
}

/** No answer at all: the connection is lost or the server is away. */
export class OfflineError extends Error {
  constructor(cause: unknown) {
    super('The server does not answer. What you typed is kept here; try again when the connection is back.', { cause })
    this.name = 'OfflineError'
  }
}

type Part<Name extends string, Value> = [Value] extends [undefined] ? unknown : { readonly [K in Name]: Value }

export type CallOptions<O> = Part<'params', OperationParamsInput<O>> &
  Part<'body', OperationBodyInput<O>> & {
    readonly query?: Exclude<OperationQueryInput<O>, undefined>
    /** The version that was edited, for versioned operations. */
    readonly baseVersion?: number
    readonly idempotencyKey?: string
    readonly signal?: AbortSignal
  }

/** The address of an operation with its parameters filled in: also for links to files. */
export function addressOf(operation: Operation, params: Readonly<Record<string, string>>, query: Readonly<Record<string, unknown>> = {}): string {
  const path = operation.path.replace(/:(\w+)/g, (_, name: string) => encodeURIComponent(params[name] ?? ''))
  const search = new URLSearchParams()
  for (const [name, value] of Object.entries(query)) if (value !== undefined && value !== '') search.set(name, String(value))
  return search.size === 0 ? path : `${path}?${search}`
}

/** Reads a refusal; an answer that is no problem document (a proxy's page, say) becomes a plain one. */
export async function problemOf(response: Response): Promise<Problem> {
  const parsed = problemSchema.safeParse(await response.json().catch(() => null))
  if (parsed.success) return parsed.data
  return {
    type: '/problems/server-error', title: 'Unexpected answer', status: response.status,
    code: response.status >= 500 ? 'service-unavailable' : 'bad-request',
    detail: `The server answered ${response.status} without saying why. Try again in a moment.`, requestId: '',
  }
}

async function send(operation: Operation, options: CallOptions<Operation> & { params?: unknown; body?: unknown }): Promise<Response> {
  const headers: Record<string, string> = { Accept: 'application/json' }
  if (operation.method !== 'get') headers['X-CSRF-Token'] = await csrfToken()
  if (options.body !== undefined) headers['Content-Type'] = 'application/json'
  if (options.baseVersion !== undefined) headers['If-Match'] = `"${options.baseVersion}"`
  if (options.idempotencyKey !== undefined) headers['Idempotency-Key'] = options.idempotencyKey
  const address = addressOf(operation, (options.params ?? {}) as Record<string, string>, (options.query ?? {}) as Record<string, unknown>)
  try {
    return await fetch(address, {
      method: operation.method.toUpperCase(), headers, credentials: 'same-origin',
      ...(options.body === undefined ? {} : { body: JSON.stringify(options.body) }),
      ...(options.signal === undefined ? {} : { signal: options.signal }),
    })
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error
    throw new OfflineError(error)
  }
}

/**
 * Calls one operation of the API.
 *
 * @throws {ApiError} with the problem when the server refuses
 * @throws {OfflineError} when there is no answer
 * @example
 * const page = await call(listPrinters, { params: { shopId }, query: { q: 'north' } })
 */
export async function call<O extends Operation>(operation: O, options: CallOptions<O>): Promise<OperationResponse<O>> {
  const given = options as CallOptions<Operation>
  let response = await send(operation, given)
  if (response.status === 403 && (await problemOf(response.clone())).code === 'csrf-token-missing') {
    // The session was renewed in another tab: fetch the new token and try once more.
    forgetCsrfToken()
    response = await send(operation, given)
  }
  if (!response.ok) throw new ApiError(await problemOf(response))
  const schema = operation.response as z.ZodType | undefined
  if (schema === undefined) return undefined as OperationResponse<O>
  return schema.parse(await response.json()) as OperationResponse<O>
}
