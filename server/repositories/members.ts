import { and, asc, eq, gt, sql } from 'drizzle-orm'
import { invitation, membership, shop, user } from '#db/schema/index.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { Invitation, Member, Shop } from '#shared/contracts/members.ts'
import type { Executor } from '../dependencies.ts'
import { openInvitation } from './people.ts'

const shopColumns = { id: shop.id, name: shop.name, demo: shop.demo, version: shop.version, createdAt: shop.createdAt }

export async function readShop(database: Executor, shopId: string): Promise<Shop | null> {
  const [row] = await database.select(shopColumns).from(shop).where(eq(shop.id, shopId))
  return row === undefined ? null : { ...row, createdAt: row.createdAt.toISOString() }
}

/** @returns null when the version has moved on */
export async function renameShop(database: Executor, shopId: string, change: { name: string; baseVersion: number }): Promise<Shop | null> {
  const [row] = await database
    .update(shop)
    .set({ name: change.name, version: sql`${shop.version} + 1` })
    .where(and(eq(shop.id, shopId), eq(shop.version, change.baseVersion)))
    .returning(shopColumns)
  return row === undefined ? null : { ...row, createdAt: row.createdAt.toISOString() }
}

/** Holds the shop's people still for a change: two owners who demote each other at once wait in line. */
export async function lockShop(database: Executor, shopId: string): Promise<void> {
  await database.select({ id: shop.id }).from(shop).where(eq(shop.id, shopId)).for('update')
}

const memberColumns = { userId: membership.userId, displayName: user.displayName, email: user.email, role: membership.role, joinedAt: membership.joinedAt }

export async function listMembers(database: Executor, shopId: string): Promise<Member[]> {
  const rows = await database
    .select(memberColumns).from(membership).innerJoin(user, eq(user.id, membership.userId))
    .where(eq(membership.shopId, shopId)).orderBy(asc(user.displayName), asc(user.id))
  return rows.map(row => ({ ...row, joinedAt: row.joinedAt.toISOString() }))
}

export async function readMember(database: Executor, shopId: string, userId: string): Promise<Member | null> {
  const [row] = await database
    .select(memberColumns).from(membership).innerJoin(user, eq(user.id, membership.userId))
    .where(and(eq(membership.shopId, shopId), eq(membership.userId, userId)))
  return row === undefined ? null : { ...row, joinedAt: row.joinedAt.toISOString() }
}

export async function updateRole(database: Executor, shopId: string, userId: string, role: Role): Promise<void> {
  await database.update(membership).set({ role }).where(and(eq(membership.shopId, shopId), eq(membership.userId, userId)))
}

export async function deleteMember(database: Executor, shopId: string, userId: string): Promise<void> {
  await database.delete(membership).where(and(eq(membership.shopId, shopId), eq(membership.userId, userId)))
}

/** @returns false when the person is a member already */
export async function insertMember(database: Executor, row: { shopId: string; userId: string; role: Role }): Promise<boolean> {
  const made = await database.insert(membership).values(row).onConflictDoNothing().returning({ userId: membership.userId })
  return made.length > 0
}

const invitationColumns = {
  id: invitation.id, email: invitation.email, role: invitation.role, invitedBy: sql<string>`coalesce(${user.displayName}, 'somebody who left')`,
  createdAt: invitation.createdAt, expiresAt: invitation.expiresAt,
}
const toInvitation = (row: { createdAt: Date; expiresAt: Date } & Omit<Invitation, 'createdAt' | 'expiresAt'>): Invitation => ({
  ...row, createdAt: row.createdAt.toISOString(), expiresAt: row.expiresAt.toISOString(),
})

export async function listInvitations(database: Executor, shopId: string, now: Date): Promise<Invitation[]> {
  const rows = await database
    .select(invitationColumns).from(invitation).leftJoin(user, eq(user.id, invitation.invitedByUserId))
    .where(and(eq(invitation.shopId, shopId), openInvitation, gt(invitation.expiresAt, now))).orderBy(asc(invitation.createdAt))
  return rows.map(toInvitation)
}

/** Takes back whatever invitation to this address is open: a new one replaces it. */
export async function revokeInvitationsTo(database: Executor, shopId: string, email: string, now: Date): Promise<void> {
  await database.update(invitation).set({ revokedAt: now }).where(and(eq(invitation.shopId, shopId), eq(invitation.email, email), openInvitation))
}

export async function insertInvitation(database: Executor, row: typeof invitation.$inferInsert): Promise<void> {
  await database.insert(invitation).values(row)
}

export async function revokeInvitation(database: Executor, shopId: string, invitationId: string, now: Date): Promise<{ email: string; role: Role } | null> {
  const [row] = await database
    .update(invitation).set({ revokedAt: now })
    .where(and(eq(invitation.shopId, shopId), eq(invitation.id, invitationId), openInvitation))
    .returning({ email: invitation.email, role: invitation.role })
  return row ?? null
}

export async function findInvitation(database: Executor, tokenHash: string, now: Date) {
  const [row] = await database
    .select({ id: invitation.id, shopId: invitation.shopId, shopName: shop.name, email: invitation.email, role: invitation.role })
    .from(invitation).innerJoin(shop, eq(shop.id, invitation.shopId))
    .where(and(eq(invitation.tokenHash, tokenHash), openInvitation, gt(invitation.expiresAt, now)))
  return row ?? null
}

/** @returns false when somebody else took it meanwhile */
export async function acceptInvitation(database: Executor, invitationId: string, now: Date): Promise<boolean> {
  const rows = await database.update(invitation).set({ acceptedAt: now }).where(and(eq(invitation.id, invitationId), openInvitation)).returning({ id: invitation.id })
  return rows.length > 0
}
