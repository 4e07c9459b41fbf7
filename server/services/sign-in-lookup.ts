import type { Executor } from '../dependencies.ts'
import { readUserWithMembership } from '../repositories/people.ts'
import type { Actor } from './actor.ts'

/** The person behind a session and, where a shop is named, their role in it; null when the person is gone. */
export async function findSignedIn(database: Executor, userId: string, shopId: string | null): Promise<Actor | null> {
  const found = await readUserWithMembership(database, userId, shopId)
  if (found === null) return null
  return {
    userId,
    displayName: found.displayName,
    email: found.email,
    shopId: found.role === null ? null : shopId,
    role: found.role,
  }
}
