import { lt } from 'drizzle-orm'
import { idempotencyKey, passwordReset, signUp } from '#db/schema/index.ts'
import type { Executor } from '../dependencies.ts'

const dayMilliseconds = 86_400_000

/** Deletes what has served its time: links that open nothing any more, and the answers kept for retries. */
export async function deleteOutdated(database: Executor, now: Date): Promise<void> {
  await database.delete(signUp).where(lt(signUp.expiresAt, now))
  await database.delete(passwordReset).where(lt(passwordReset.expiresAt, now))
  await database.delete(idempotencyKey).where(lt(idempotencyKey.createdAt, new Date(now.getTime() - dayMilliseconds)))
}
