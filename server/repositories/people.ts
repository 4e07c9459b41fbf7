import { and, eq, sql } from 'drizzle-orm'
import { membership, user } from '#db/schema/index.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { Executor } from '../dependencies.ts'

/** One statement for each signed-in call: the person, and their role in the named shop. */
export async function readUserWithMembership(
  database: Executor,
  userId: string,
  shopId: string | null,
): Promise<{ displayName: string; email: string; role: Role | null } | null> {
  const known = shopId !== null && /^[0-9a-f-]{36}$/i.test(shopId)
  const [row] = await database
    .select({ displayName: user.displayName, email: user.email, role: membership.role })
    .from(user)
    .leftJoin(membership, and(eq(membership.userId, user.id), known ? eq(membership.shopId, shopId) : sql`false`))
    .where(eq(user.id, userId))
  return row === undefined ? null : row
}
