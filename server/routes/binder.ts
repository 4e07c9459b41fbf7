import { createHash } from 'node:crypto'
import type { Request, Response, Router } from 'express'
import type { z } from 'zod'
import type { FieldProblem } from '#shared/contracts/error.ts'
import type { Operation, OperationBody, OperationParams, OperationQuery, OperationResponse } from '#shared/contracts/operation.ts'
import { AppError, notFound } from '../errors.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import type { Actor, ShopActor } from '../services/actor.ts'
import { rateLimitCaller, RateLimits } from '../middleware/rate-limit.ts'
import { findSignedIn } from '../services/sign-in-lookup.ts'
import { onceForKey } from '../services/idempotency.ts'
import { access } from './access.ts'

export interface Call<O> {
  readonly params: OperationParams<O>
  readonly query: OperationQuery<O>
  readonly body: OperationBody<O>
  /** From If-Match; 0 where the operation is not versioned. */
  readonly baseVersion: number
  readonly actor: Actor | null
  /** The pool, or the open transaction of a retry-safe create. */
  readonly database: Executor
  readonly request: Request
  readonly response: Response
}

type Answer<O> = OperationResponse<O> extends undefined ? void : OperationResponse<O>
export type Handler<O> = (call: Call<O>) => Promise<Answer<O>>
type ShopHandler<O> = (call: Omit<Call<O>, 'actor'> & { readonly actor: ShopActor }) => Promise<Answer<O>>

/** Names of fields that nobody asked for may be as long as the body. */
const shortened = (text: string): string => (text.length > 200 ? `${text.slice(0, 199)}…` : text)

/** Texts that PostgreSQL cannot hold: with a zero byte, or with half of a character that takes two. */
function unstorableTexts(value: unknown, path: string): FieldProblem[] {
  if (typeof value === 'string') {
    return /[\0\p{Surrogate}]/u.test(value) ? [{ path, sentence: 'Holds a character that cannot be stored; type it anew.' }] : []
  }
  if (typeof value !== 'object' || value === null) return []
  return Object.entries(value).flatMap(([name, part]) => unstorableTexts(part, `${path}.${name}`))
}

function parsePart<Schema extends z.ZodType>(schema: Schema | undefined, value: unknown, part: string): z.output<Schema> | undefined {
  if (schema === undefined) return undefined
  const parsed = schema.safeParse(value)
  const fields: FieldProblem[] = parsed.success
    ? unstorableTexts(parsed.data, part)
    : parsed.error.issues.slice(0, 50).map(issue => ({
        path: shortened([part, ...issue.path.map(String)].join('.')),
        // A message may repeat what was sent.
        sentence: shortened(issue.message),
      }))
  if (parsed.success && fields.length === 0) return parsed.data
  // An id in the address that is no id names nothing.
  if (part === 'params') throw notFound('thing')
  const first = fields[0]
  throw new AppError('validation-failed', {
    detail: first === undefined ? 'The request is not usable.' : `${first.path.replace(/^(body|query)\.?/, '') || 'The request'}: ${first.sentence}`,
    fields,
  })
}

function baseVersionOf(operation: Operation, request: Request): number {
  if (operation.versioned !== true) return 0
  const header = request.get('If-Match')
  const match = /^(?:W\/)?"(\d{1,9})"$/.exec(header ?? '')
  if (match === null) {
    throw new AppError('if-match-required', { detail: 'Say which version you edited (If-Match: "version"), so that nobody’s work is overwritten.' })
  }
  return Number(match[1])
}

/** Binds operations to handlers: rights, parsing, transactions and answers happen here and nowhere else. */
export class Binder {
  readonly implemented = new Map<string, Operation>()
  readonly rateLimits: RateLimits

  constructor(
    private readonly router: Router,
    readonly dependencies: Dependencies,
  ) {
    this.rateLimits = new RateLimits(dependencies.pool, dependencies.config.rateLimitFactor)
  }

  /** For operations outside a shop. */
  implement<O extends Operation>(operation: O, handler: Handler<O>): void {
    const rights = access[operation.id]
    if (rights === undefined) throw new Error(`server/routes/access.ts says nothing about ${operation.id}`)
    if (this.implemented.has(operation.id)) throw new Error(`${operation.id} is implemented twice`)
    this.implemented.set(operation.id, operation)

    this.router[operation.method](operation.path, async (request, response) => {
      const actor = await this.authorise(operation, request)
      const base = {
        params: parsePart(operation.params, request.params, 'params'),
        query: parsePart(operation.query, request.query, 'query'),
        body: parsePart(operation.body, request.body, 'body'),
        baseVersion: baseVersionOf(operation, request),
        actor,
        request,
        response,
      }
      await this.rateLimits.count(operation.id, rateLimitCaller(base))
      const run = async (database: Executor) => handler({ ...base, database } as unknown as Call<O>)
      const key = request.get('Idempotency-Key')
      const answer =
        operation.retrySafe === true && key !== undefined && typeof actor?.shopId === 'string'
          ? await onceForKey(this.dependencies.database, {
              shopId: actor.shopId,
              userId: actor.userId,
              key,
              requestHash: createHash('sha256').update(JSON.stringify([operation.id, base.params, base.body])).digest('hex'),
              run,
            })
          : await run(this.dependencies.database)
      this.send(operation, response, answer)
    })
  }

  /** @throws {Error} with the names of operations that the contracts promise and nobody implements */
  checkComplete(operations: readonly Operation[]): void {
    const missing = operations.filter(operation => !this.implemented.has(operation.id)).map(operation => operation.id)
    if (missing.length > 0) throw new Error(`not implemented: ${missing.join(', ')}`)
  }

  /** For operations under /api/shops/:shopId: the actor is a member with one of the table's roles. */
  implementInShop<O extends Operation>(operation: O, handler: ShopHandler<O>): void {
    const rights = access[operation.id]
    if (!Array.isArray(rights)) throw new Error(`${operation.id} is in a shop, but access.ts gives no roles for it`)
    this.implement(operation, call => {
      const { actor } = call
      if (actor === null || actor.shopId === null || actor.role === null) throw new Error('a shop call without an actor')
      return handler({ ...call, actor: { ...actor, shopId: actor.shopId, role: actor.role } })
    })
  }

  private async authorise(operation: Operation, request: Request): Promise<Actor | null> {
    const rights = access[operation.id]
    if (rights === 'development') {
      if (this.dependencies.mailbox === null) throw new AppError('not-found', { detail: 'There is no such page.' })
      return null
    }
    const userId = request.session.userId
    if (userId === undefined) {
      if (rights === 'public') return null
      throw new AppError('sign-in-required', { detail: 'Sign in first. What you typed is kept in this browser.' })
    }
    const shopId = request.params.shopId
    const signedIn = await findSignedIn(this.dependencies.database, userId, typeof shopId === 'string' ? shopId : null)
    if (signedIn === null) {
      if (rights === 'public') return null
      throw new AppError('sign-in-required', { detail: 'Sign in first. What you typed is kept in this browser.' })
    }
    if (rights === 'public' || rights === 'signed-in') return signedIn
    // A shop that one does not belong to answers as one that does not exist.
    if (signedIn.role === null) throw new AppError('not-found', { detail: 'There is no such shop among yours.' })
    if (!rights?.includes(signedIn.role)) {
      throw new AppError('not-allowed', { detail: `Your role (${signedIn.role}) cannot do this. Ask an owner of the shop.` })
    }
    return signedIn
  }

  private send(operation: Operation, response: Response, answer: unknown): void {
    if (response.headersSent || response.writableEnded) return
    if (operation.response === undefined) {
      response.status(operation.status).end()
      return
    }
    // A wrong answer is our defect: it becomes a logged 500, never a half-right page.
    const body: unknown = operation.response.parse(answer)
    if (typeof body === 'object' && body !== null && 'version' in body && typeof body.version === 'number') {
      response.setHeader('ETag', `"${body.version}"`)
    }
    response.status(operation.status).json(body)
  }
}
