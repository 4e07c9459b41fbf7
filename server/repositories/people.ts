import { and, count, eq, gt, isNull, ne, sql } from 'drizzle-orm'
import { invitation, membership, passwordReset, session, shop, signUp, user } from '#db/schema/index.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { Membership } from '#shared/contracts/session.ts'
import type { Executor } from '../dependencies.ts'
import { preparedOnce } from './prepared.ts'

export interface UserRow {
  readonly id: string
  readonly email: string
  readonly displayName: string
  readonly passwordHash: string
}

const signedInStatement = preparedOnce(database =>
  database
    .select({ displayName: user.displayName, email: user.email, role: membership.role })
    .from(user)
    .leftJoin(membership, and(eq(membership.userId, user.id), eq(membership.shopId, sql.placeholder('shopId'))))
    .where(eq(user.id, sql.placeholder('userId')))
    .prepare('read_signed_in'))

/** One statement for each signed-in call: the person, and their role in the named shop. */
export async function readUserWithMembership(
  database: Executor,
  userId: string,
  shopId: string | null,
): Promise<{ displayName: string; email: string; role: Role | null } | null> {
  const known = shopId !== null && /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/i.test(shopId)
  // Nothing equals null: without a shop there is no role.
  const [row] = await signedInStatement(database).execute({ userId, shopId: known ? shopId : null })
  return row ?? null
}

const userColumns = { id: user.id, email: user.email, displayName: user.displayName, passwordHash: user.passwordHash }

export async function findUserByEmail(database: Executor, email: string): Promise<UserRow | null> {
  const [row] = await database.select(userColumns).from(user).where(eq(user.email, email))
  return row ?? null
}

export async function findUserById(database: Executor, id: string): Promise<UserRow | null> {
  const [row] = await database.select(userColumns).from(user).where(eq(user.id, id))
  return row ?? null
}

/** @returns false when the address is taken */
export async function insertUser(database: Executor, row: UserRow): Promise<boolean> {
  const made = await database.insert(user).values(row).onConflictDoNothing().returning({ id: user.id })
  return made.length > 0
}

export async function updateDisplayName(database: Executor, userId: string, displayName: string): Promise<void> {
  await database.update(user).set({ displayName }).where(eq(user.id, userId))
}

export async function updatePassword(database: Executor, userId: string, passwordHash: string): Promise<void> {
  await database.update(user).set({ passwordHash }).where(eq(user.id, userId))
}

/** Ends every session of a person, but for the one named. */
export async function deleteSessions(database: Executor, userId: string, exceptSessionId: string | null): Promise<void> {
  await database.delete(session).where(and(sql`${session.sess} ->> 'userId' = ${userId}`, exceptSessionId === null ? undefined : ne(session.sid, exceptSessionId)))
}

export async function listMemberships(database: Executor, userId: string): Promise<Membership[]> {
  return database
    .select({ shopId: shop.id, shopName: shop.name, role: membership.role, demo: shop.demo })
    .from(membership)
    .innerJoin(shop, eq(shop.id, membership.shopId))
    .where(eq(membership.userId, userId))
    .orderBy(shop.name, shop.id)
}

/** Makes a shop and its first owner. */
export async function insertShopWithOwner(database: Executor, row: { shopId: string; name: string; ownerId: string }): Promise<void> {
  await database.insert(shop).values({ id: row.shopId, name: row.name })
  await database.insert(membership).values({ shopId: row.shopId, userId: row.ownerId, role: 'owner' })
}

export async function insertSignUp(database: Executor, row: typeof signUp.$inferInsert): Promise<void> {
  await database.insert(signUp).values(row)
}

/** Takes the sign-up of a link, once: a second click finds nothing. */
export async function takeSignUp(database: Executor, tokenHash: string, now: Date) {
  const [row] = await database
    .update(signUp)
    .set({ confirmedAt: now })
    .where(and(eq(signUp.tokenHash, tokenHash), isNull(signUp.confirmedAt), gt(signUp.expiresAt, now)))
    .returning()
  return row ?? null
}

/** One statement whether the address is known or not: an unknown one gets no row, and the time tells nothing. */
export async function insertPasswordReset(
  database: Executor,
  row: { id: string; email: string; tokenHash: string; createdAt: Date; expiresAt: Date },
): Promise<void> {
  const known = database
    .select({
      id: sql`${row.id}::uuid`.as('reset_id'),
      userId: user.id,
      tokenHash: sql`${row.tokenHash}::varchar`.as('token_hash'),
      createdAt: sql`${row.createdAt.toISOString()}::timestamptz`.as('reset_created_at'),
      expiresAt: sql`${row.expiresAt.toISOString()}::timestamptz`.as('expires_at'),
      usedAt: sql`null::timestamptz`.as('used_at'),
    })
    .from(user)
    .where(eq(user.email, row.email))
  await database.insert(passwordReset).select(known)
}

/** Takes the reset of a link, once. */
export async function takePasswordReset(database: Executor, tokenHash: string, now: Date): Promise<{ userId: string } | null> {
  const [row] = await database
    .update(passwordReset)
    .set({ usedAt: now })
    .where(and(eq(passwordReset.tokenHash, tokenHash), isNull(passwordReset.usedAt), gt(passwordReset.expiresAt, now)))
    .returning({ userId: passwordReset.userId })
  return row ?? null
}

/** Other links of the same person stop working when a new password is set. */
export async function voidPasswordResets(database: Executor, userId: string, now: Date): Promise<void> {
  await database.update(passwordReset).set({ usedAt: now }).where(and(eq(passwordReset.userId, userId), isNull(passwordReset.usedAt)))
}

export async function countOwners(database: Executor, shopId: string): Promise<number> {
  const [row] = await database.select({ owners: count() }).from(membership).where(and(eq(membership.shopId, shopId), eq(membership.role, 'owner')))
  return row?.owners ?? 0
}

/** Open invitations to an address in a shop. */
export const openInvitation = and(isNull(invitation.acceptedAt), isNull(invitation.revokedAt))
