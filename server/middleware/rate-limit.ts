import { createHash } from 'node:crypto'
import { isIPv6 } from 'node:net'
import type { Request } from 'express'
import type pg from 'pg'
import { RateLimiterPostgres, RateLimiterRes } from 'rate-limiter-flexible'
import { AppError } from '../errors.ts'

/** Whose calls are counted together. */
export interface RateLimitCaller {
  /** Network address. */
  readonly visitor: string
  /** The e-mail address that the call is about. */
  readonly address: string | null
  /** Who is signed in. */
  readonly person: string | null
}

interface Rule {
  /** Calls allowed in the window. */
  readonly points: number
  readonly windowSeconds: number
  readonly by: 'address' | 'visitor' | 'address from visitor' | 'person'
}

const quarterHour = 900
const hour = 3600

/**
 * How often the doors that guess-work knocks at may be used: generous for people, tight for programs.
 *
 * Guesses at one address are counted per network address first, so that a stranger who guesses does not lock the person
 * out; the wider count per address stops guessing from many networks.
 */
export const rateLimitRules: Readonly<Record<string, readonly Rule[]>> = {
  signIn: [
    { points: 10, windowSeconds: quarterHour, by: 'address from visitor' },
    { points: 50, windowSeconds: quarterHour, by: 'address' },
    { points: 60, windowSeconds: quarterHour, by: 'visitor' },
  ],
  signUp: [
    { points: 5, windowSeconds: hour, by: 'address' },
    { points: 30, windowSeconds: hour, by: 'visitor' },
  ],
  requestPasswordReset: [
    { points: 5, windowSeconds: hour, by: 'address' },
    { points: 30, windowSeconds: hour, by: 'visitor' },
  ],
  confirmSignUp: [{ points: 60, windowSeconds: hour, by: 'visitor' }],
  completePasswordReset: [{ points: 60, windowSeconds: hour, by: 'visitor' }],
  lookUpInvitation: [{ points: 120, windowSeconds: hour, by: 'visitor' }],
  acceptInvitation: [{ points: 60, windowSeconds: hour, by: 'visitor' }],
  createInvitation: [
    { points: 10, windowSeconds: hour, by: 'address' },
    { points: 100, windowSeconds: hour, by: 'person' },
  ],
  changePassword: [{ points: 20, windowSeconds: quarterHour, by: 'person' }],
  createShop: [{ points: 20, windowSeconds: hour, by: 'person' }],
}

/**
 * The network that a visitor comes from: an IPv6 customer has a whole /64 to call from.
 *
 * @example
 * networkOf('2001:db8::7') // => '2001:db8:0:0'
 */
export function networkOf(ip: string): string {
  const mapped = /^::ffff:(\d+\.\d+\.\d+\.\d+)$/i.exec(ip)
  if (mapped?.[1] !== undefined) return mapped[1]
  if (!isIPv6(ip)) return ip
  const [head = '', tail] = ip.toLowerCase().split('::')
  const groups = head.split(':').filter(group => group !== '')
  const after = (tail ?? '').split(':').filter(group => group !== '').length
  const missing = tail === undefined ? 0 : 8 - groups.length - after
  return [...groups, ...Array.from({ length: missing }, () => '0'), ...(tail ?? '').split(':')].slice(0, 4).join(':')
}

function addressIn(body: unknown): string | null {
  return typeof body === 'object' && body !== null && 'email' in body && typeof body.email === 'string' ? body.email : null
}

export function rateLimitCaller(call: { request: Request; body: unknown; actor: { userId: string } | null }): RateLimitCaller {
  return { visitor: networkOf(call.request.ip ?? 'unknown'), address: addressIn(call.body), person: call.actor?.userId ?? null }
}

function keyOf(by: Rule['by'], caller: RateLimitCaller): string | null {
  const { address, person, visitor } = caller
  if (by === 'visitor') return visitor
  if (by === 'person') return person
  if (address === null) return null
  return by === 'address' ? address : `${address} ${visitor}`
}

/** The counter's name: as long for every address, and the table does not say whose it is. */
const nameOf = (key: string): string => createHash('sha256').update(key).digest('base64url')

/** Counts calls in PostgreSQL, so that every server sees the same count and a restart forgets none. */
export class RateLimits {
  private readonly limiters = new Map<string, readonly { readonly by: Rule['by']; readonly limiter: RateLimiterPostgres }[]>()

  constructor(pool: pg.Pool, factor: number) {
    for (const [operationId, list] of Object.entries(rateLimitRules)) {
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
  async count(operationId: string, caller: RateLimitCaller): Promise<void> {
    for (const { by, limiter } of this.limiters.get(operationId) ?? []) {
      const key = keyOf(by, caller)
      if (key === null) continue
      try {
        await limiter.consume(nameOf(key))
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

  /** After a right password: former wrong ones of this person, from here, no longer count. */
  async forgive(operationId: string, caller: RateLimitCaller): Promise<void> {
    for (const { by, limiter } of this.limiters.get(operationId) ?? []) {
      const key = by === 'address from visitor' ? keyOf(by, caller) : null
      if (key !== null) await limiter.delete(nameOf(key))
    }
  }
}
