import type { Role } from '#shared/contracts/common.ts'
import type { Invitation, Member, Shop } from '#shared/contracts/members.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError, notFound, staleEdit } from '../errors.ts'
import { invitationMail } from '../mail/texts.ts'
import * as members from '../repositories/members.ts'
import { countOwners, findUserByEmail, findUserById, insertUser } from '../repositories/people.ts'
import type { ShopActor } from './actor.ts'
import { auditBy } from './audit.ts'
import { hashPassword } from './passwords.ts'
import { hashToken, newToken } from './tokens.ts'

const invitationDays = 7
const day = 86_400_000

export async function shopOf(dependencies: Dependencies, actor: ShopActor): Promise<Shop> {
  const found = await members.readShop(dependencies.database, actor.shopId)
  if (found === null) throw notFound('shop')
  return found
}

export async function renameShop(dependencies: Dependencies, actor: ShopActor, change: { name: string; baseVersion: number }): Promise<Shop> {
  return dependencies.database.transaction(async transaction => {
    const before = await members.readShop(transaction, actor.shopId)
    const after = await members.renameShop(transaction, actor.shopId, change)
    if (after === null) throw staleEdit('shop', before)
    await auditBy(dependencies, transaction, actor, { action: 'renamed', thing: 'shop', thingId: actor.shopId, before: { name: before?.name }, after: { name: after.name } })
    return after
  })
}

export const membersOf = (dependencies: Dependencies, actor: ShopActor): Promise<Member[]> => members.listMembers(dependencies.database, actor.shopId)

export const invitationsOf = (dependencies: Dependencies, actor: ShopActor): Promise<Invitation[]> =>
  members.listInvitations(dependencies.database, actor.shopId, dependencies.clock())

/**
 * Holds the shop's people still for a change, and asks again whether the actor may make it: whoever was demoted by
 * another owner while waiting in line may not.
 */
async function holdPeople(transaction: Executor, actor: ShopActor): Promise<void> {
  await members.lockShop(transaction, actor.shopId)
  const present = await members.readMember(transaction, actor.shopId, actor.userId)
  if (present?.role !== actor.role) {
    throw new AppError('not-allowed', { detail: 'Your role in this shop was changed just now. Nothing was done; reload the page.' })
  }
}

/** Inside the transaction and with the shop held still, so that two at once cannot both take the last owner away. */
async function keepAnOwner(transaction: Executor, shopId: string, leaving: Member): Promise<void> {
  if (leaving.role === 'owner' && (await countOwners(transaction, shopId)) < 2) {
    throw new AppError('last-owner', { detail: `${leaving.displayName} is the only owner. Make somebody else an owner first.` })
  }
}

export async function changeRole(dependencies: Dependencies, actor: ShopActor, change: { userId: string; role: Role }): Promise<Member> {
  return dependencies.database.transaction(async transaction => {
    await holdPeople(transaction, actor)
    const before = await members.readMember(transaction, actor.shopId, change.userId)
    if (before === null) throw notFound('member')
    if (before.role === change.role) return before
    await keepAnOwner(transaction, actor.shopId, before)
    await members.updateRole(transaction, actor.shopId, change.userId, change.role)
    await auditBy(dependencies, transaction, actor, { action: 'role changed', thing: 'member', thingId: change.userId, before: { role: before.role }, after: { role: change.role } })
    return { ...before, role: change.role }
  })
}

export async function removeMember(dependencies: Dependencies, actor: ShopActor, userId: string): Promise<void> {
  if (actor.role !== 'owner' && userId !== actor.userId) {
    throw new AppError('not-allowed', { detail: `Your role (${actor.role}) can only remove yourself. Ask an owner of the shop.` })
  }
  await dependencies.database.transaction(async transaction => {
    await holdPeople(transaction, actor)
    const before = await members.readMember(transaction, actor.shopId, userId)
    if (before === null) throw notFound('member')
    await keepAnOwner(transaction, actor.shopId, before)
    await members.deleteMember(transaction, actor.shopId, userId)
    await auditBy(dependencies, transaction, actor, { action: 'removed', thing: 'member', thingId: userId, before: { role: before.role, email: before.email } })
  })
}

export async function invite(dependencies: Dependencies, actor: ShopActor, body: { email: string; role: Role }): Promise<Invitation> {
  const { config, database, mailQueue } = dependencies
  const token = newToken()
  const now = dependencies.clock()
  return database.transaction(async transaction => {
    await holdPeople(transaction, actor)
    const people = await members.listMembers(transaction, actor.shopId)
    if (people.some(person => person.email === body.email)) {
      throw new AppError('already-member', { detail: `${body.email} belongs to this shop already; change the role in the list.` })
    }
    await members.revokeInvitationsTo(transaction, actor.shopId, body.email, now)
    const made = { id: dependencies.newId(), email: body.email, role: body.role, createdAt: now, expiresAt: new Date(now.getTime() + invitationDays * day) }
    await members.insertInvitation(transaction, { ...made, shopId: actor.shopId, tokenHash: hashToken(token), invitedByUserId: actor.userId })
    const shop = await members.readShop(transaction, actor.shopId)
    await mailQueue.enqueue(invitationMail(body.email, { shopName: shop?.name ?? '', invitedBy: actor.displayName, role: body.role, link: `${config.publicUrl}/invitation?token=${token}` }), transaction)
    await auditBy(dependencies, transaction, actor, { action: 'invited', thing: 'invitation', thingId: made.id, after: { email: body.email, role: body.role } })
    return { ...made, invitedBy: actor.displayName, createdAt: made.createdAt.toISOString(), expiresAt: made.expiresAt.toISOString() }
  })
}

export async function revokeInvitation(dependencies: Dependencies, actor: ShopActor, invitationId: string): Promise<void> {
  await dependencies.database.transaction(async transaction => {
    const before = await members.revokeInvitation(transaction, actor.shopId, invitationId, dependencies.clock())
    if (before === null) throw notFound('open invitation')
    await auditBy(dependencies, transaction, actor, { action: 'revoked', thing: 'invitation', thingId: invitationId, before })
  })
}

function notValid(): AppError {
  return new AppError('link-not-valid', { detail: 'This invitation was accepted, taken back or is too old. Ask the shop for a new one.' })
}

/** The token proves that the mail was read, so what it opens may be told. */
export async function lookUpInvitation(dependencies: Dependencies, token: string) {
  const found = await members.findInvitation(dependencies.database, hashToken(token), dependencies.clock())
  if (found === null) throw notValid()
  const person = await findUserByEmail(dependencies.database, found.email)
  return { shopName: found.shopName, email: found.email, role: found.role, hasAccount: person !== null }
}

/** Answers the id of the person who is now a member. */
export async function acceptInvitation(
  dependencies: Dependencies,
  given: { token: string; newPerson?: { displayName: string; password: string } | undefined; signedInAs: string | null },
): Promise<string> {
  const passwordHash = given.newPerson === undefined ? null : await hashPassword(given.newPerson.password)
  return dependencies.database.transaction(async transaction => {
    const now = dependencies.clock()
    const found = await members.findInvitation(transaction, hashToken(given.token), now)
    if (found === null) throw notValid()
    const userId = await personFor(dependencies, transaction, { email: found.email, passwordHash, displayName: given.newPerson?.displayName ?? null, signedInAs: given.signedInAs })
    if (!(await members.acceptInvitation(transaction, found.id, now))) throw notValid()
    const joined = await members.insertMember(transaction, { shopId: found.shopId, userId, role: found.role })
    if (!joined) throw new AppError('already-member', { detail: 'You belong to this shop already.' })
    await auditBy(dependencies, transaction, { shopId: found.shopId, userId }, { action: 'joined', thing: 'member', thingId: userId, after: { role: found.role } })
    return userId
  })
}

function hasAccount(email: string): AppError {
  return new AppError('sign-in-required', { detail: `${email} has an account: sign in with it, then accept.` })
}

async function personFor(
  dependencies: Dependencies,
  transaction: Executor,
  given: { email: string; passwordHash: string | null; displayName: string | null; signedInAs: string | null },
): Promise<string> {
  const known = await findUserByEmail(transaction, given.email)
  if (given.signedInAs !== null) {
    const present = await findUserById(transaction, given.signedInAs)
    if (present?.id === known?.id && known !== null) return known.id
    throw new AppError('not-allowed', { detail: `This invitation is for ${given.email}, but you are signed in as ${present?.email ?? 'somebody else'}. Sign out first.` })
  }
  if (known !== null) throw hasAccount(given.email)
  if (given.passwordHash === null || given.displayName === null) {
    throw new AppError('validation-failed', { detail: 'Give your name and a password.', fields: [{ path: 'body.newPerson', sentence: 'Give your name and a password.' }] })
  }
  const id = dependencies.newId()
  const made = await insertUser(transaction, { id, email: given.email, displayName: given.displayName, passwordHash: given.passwordHash })
  if (!made) throw hasAccount(given.email)
  return id
}
