import { and, eq } from 'drizzle-orm'
import { idempotencyKey } from '#db/schema/index.ts'
import type { Executor } from '../dependencies.ts'

interface Key {
  readonly shopId: string
  readonly userId: string
  readonly key: string
}

const ofKey = (k: Key) => and(eq(idempotencyKey.shopId, k.shopId), eq(idempotencyKey.userId, k.userId), eq(idempotencyKey.key, k.key))

/** Takes the key, or answers what stands under it; waits for a transaction that holds it. */
export async function claimIdempotencyKey(
  transaction: Executor,
  claim: Key & { requestHash: string },
): Promise<{ requestHash: string; response: unknown } | null> {
  const taken = await transaction
    .insert(idempotencyKey)
    .values({ shopId: claim.shopId, userId: claim.userId, key: claim.key, requestHash: claim.requestHash })
    .onConflictDoNothing()
    .returning({ key: idempotencyKey.key })
  if (taken.length > 0) return null
  const [former] = await transaction.select().from(idempotencyKey).where(ofKey(claim))
  return former === undefined ? null : { requestHash: former.requestHash, response: former.response }
}

export async function keepIdempotentAnswer(transaction: Executor, key: Key, response: unknown): Promise<void> {
  await transaction.update(idempotencyKey).set({ response }).where(ofKey(key))
}
