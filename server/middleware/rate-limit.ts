import type { Request } from 'express'
import type pg from 'pg'
import { RateLimiterPostgres, RateLimiterRes } from 'rate-limiter-flexible'
import { AppError } from '../errors.ts'

interface Rule {
  /** Calls allowed in the window. */
  readonly points: number
  readonly windowSeconds: number
  /** Whom the calls are counted for. */
  readonly by: 'address' | 'visitor'
}

/**
 * How often the doors that guess-work knocks at may be used. Per address: an e-mail address being guessed or mailed.
 * Per visitor: one network address. Generous for people, tight for programs.
 */
const rules: Readonly<Record<string, readonly Rule[]>> = {
  signIn: [
    { points: 10, windowSeconds: 900, by: 'address' },
    { points: 60, windowSeconds: 900, by: 'visitor' },
  ],
  signUp: [
    { points: 5, windowSeconds: 3600, by: 'address' },
    { points: 30, windowSeconds: 3600, by: 'visitor' },
  ],
  requestPasswordReset: [
    { points: 5, windowSeconds: 3600, by: 'address' },
    { points: 30, windowSeconds: 3600, by: 'visitor' },
  ],
  confirmSignUp: [{ points: 60, windowSeconds: 3600, by: 'visitor' }],
  completePasswordReset: [{ points: 60, windowSeconds: 3600, by: 'visitor' }],
  lookUpInvitation: [{ points: 120, windowSeconds: 3600, by: 'visitor' }],
  acceptInvitation: [{ points: 60, windowSeconds: 3600, by: 'visitor' }],
  createInvitation: [{ points: 100, windowSeconds: 3600, by: 'visitor' }],
  changePassword: [{ points: 20, windowSeconds: 900, by: 'visitor' }],
  createShop: [{ points: 20, windowSeconds: 3600, by: 'visitor' }],
}

/** Counts calls in PostgreSQL, so that every server sees the same count and a restart forgets none. */
export class RateLimits {
  private readonly limiters = new Map<string, readonly { readonly by: Rule['by']; readonly limiter: RateLimiterPostgres }[]>()

  constructor(pool: pg.Pool, factor: number) {
    for (const [operationId, list] of Object.entries(rules)) {
      this.limiters.set(operationId, list.map(rule => ({
        by: rule.by,
        limiter: new RateLimiterPostgres({
          storeClient: pool,
          storeType: 'pool',
          tableName: 'rate_limit',
          tableCreated: true,
          keyPrefix: `${operationId}:${rule.by}`,
          points: Math.max(1, Math.round(rule.points * factor)),
          duration: rule.windowSeconds,
        }),
      })))
    }
  }

  /**
   * Counts a call.
   *
   * @throws {AppError} `too-many-requests` with the seconds to wait
   */
  async count(operationId: string, request: Request, body: unknown): Promise<void> {
    for (const { by, limiter } of this.limiters.get(operationId) ?? []) {
      const key = by === 'visitor' ? (request.ip ?? 'unknown') : addressOf(body)
      if (key === null) continue
      try {
        await limiter.consume(key)
      } catch (error) {
        if (!(error instanceof RateLimiterRes)) throw error
        const seconds = Math.max(1, Math.ceil(error.msBeforeNext / 1000))
        throw new AppError('too-many-requests', {
          detail: `Too many tries. Wait ${seconds < 120 ? `${seconds} seconds` : `${Math.ceil(seconds / 60)} minutes`} and try again.`,
          retryAfterSeconds: seconds,
        })
      }
    }
  }
}

function addressOf(body: unknown): string | null {
  return typeof body === 'object' && body !== null && 'email' in body && typeof body.email === 'string' ? body.email : null
}
