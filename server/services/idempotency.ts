import type { Database, Executor } from '../dependencies.ts'
import { AppError } from '../errors.ts'
import { claimIdempotencyKey, keepIdempotentAnswer } from '../repositories/idempotency.ts'

/**
 * Runs a create once for a key: key, created thing and kept answer stand or fall in one transaction, so a server that
 * dies half-way leaves nothing behind, and a retry that overtakes the first call waits for it and gets its answer.
 *
 * @throws {AppError} `idempotency-key-reused` when the key came with another request before
 */
export async function onceForKey<Answer>(
  database: Database,
  call: { shopId: string; userId: string; key: string; requestHash: string; run: (transaction: Executor) => Promise<Answer> },
): Promise<unknown> {
  if (call.key.length > 200) throw new AppError('bad-request', { detail: 'An Idempotency-Key has at most 200 characters.' })
  return database.transaction(async transaction => {
    const former = await claimIdempotencyKey(transaction, call)
    if (former !== null) {
      if (former.requestHash !== call.requestHash) {
        throw new AppError('idempotency-key-reused', { detail: 'This Idempotency-Key was used for another request before. Use a new one.' })
      }
      return former.response
    }
    const answer = await call.run(transaction)
    await keepIdempotentAnswer(transaction, call, answer)
    return answer
  })
}
