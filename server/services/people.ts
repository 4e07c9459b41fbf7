import type { OperationBody } from '#shared/contracts/operation.ts'
import type { completePasswordReset, signIn, signUp } from '#shared/contracts/session.ts'
import type { Dependencies } from '../dependencies.ts'
import { AppError } from '../errors.ts'
import { alreadyRegisteredMail, confirmSignUpMail, noAccountMail, passwordResetMail } from '../mail/texts.ts'
import {
  deleteSessions, findUserByEmail, findUserById, insertPasswordReset, insertShopWithOwner, insertSignUp, insertUser, takePasswordReset,
  takeSignUp, updateDisplayName, updatePassword, voidPasswordResets,
} from '../repositories/people.ts'
import { auditBy, auditByPerson } from './audit.ts'
import { hashPassword, passwordMatches } from './passwords.ts'
import { hashToken, newToken } from './tokens.ts'

const hour = 3_600_000
const signUpHours = 24
const resetHours = 1

function linkNotValid(what: string): AppError {
  return new AppError('link-not-valid', { detail: `This link is used up or too old. ${what}` })
}

/** The same work and the same answer for known and unknown addresses; what differs is in the mail. */
export async function beginSignUp(dependencies: Dependencies, body: OperationBody<typeof signUp>): Promise<void> {
  const { config, database, mailQueue } = dependencies
  const passwordHash = await hashPassword(body.password)
  const known = await findUserByEmail(database, body.email)
  const token = newToken()
  const now = dependencies.clock()
  await database.transaction(async transaction => {
    // Also for a known address, where the token is never sent: the database does the same work.
    await insertSignUp(transaction, {
      id: dependencies.newId(), email: body.email, displayName: body.displayName, shopName: body.shopName, passwordHash,
      tokenHash: hashToken(token), createdAt: now, expiresAt: new Date(now.getTime() + signUpHours * hour),
    })
    const mail = known === null
      ? confirmSignUpMail(body.email, { ...body, link: `${config.publicUrl}/sign-up/confirm?token=${token}` })
      : alreadyRegisteredMail(body.email, { displayName: known.displayName, link: `${config.publicUrl}/sign-in` })
    await mailQueue.enqueue(mail, transaction)
  })
}

/** Opens the shop; answers the new owner's id. */
export async function confirmSignUp(dependencies: Dependencies, token: string): Promise<string> {
  return dependencies.database.transaction(async transaction => {
    const pending = await takeSignUp(transaction, hashToken(token), dependencies.clock())
    if (pending === null) throw linkNotValid('Sign up again, or sign in if you did that before.')
    const userId = dependencies.newId()
    const made = await insertUser(transaction, { id: userId, email: pending.email, displayName: pending.displayName, passwordHash: pending.passwordHash })
    if (!made) throw linkNotValid('This address has an account by now: sign in.')
    const shopId = dependencies.newId()
    await insertShopWithOwner(transaction, { shopId, name: pending.shopName, ownerId: userId })
    await auditBy(dependencies, transaction, { shopId, userId }, { action: 'created', thing: 'shop', thingId: shopId, after: { name: pending.shopName } })
    return userId
  })
}

/** Answers the person's id; the same sentence whether the address or the password is wrong. */
export async function checkSignIn(dependencies: Dependencies, body: OperationBody<typeof signIn>): Promise<string> {
  const found = await findUserByEmail(dependencies.database, body.email)
  if (!(await passwordMatches(found?.passwordHash ?? null, body.password)) || found === null) {
    throw new AppError('wrong-credentials', { detail: 'Address and password do not fit together.' })
  }
  return found.id
}

/** The same work and the same answer for known and unknown addresses. */
export async function beginPasswordReset(dependencies: Dependencies, email: string): Promise<void> {
  const { config, database, mailQueue } = dependencies
  const found = await findUserByEmail(database, email)
  const token = newToken()
  const now = dependencies.clock()
  const mail = found === null
    ? noAccountMail(email, { link: `${config.publicUrl}/sign-up` })
    : passwordResetMail(email, { displayName: found.displayName, link: `${config.publicUrl}/reset/new?token=${token}` })
  await database.transaction(async transaction => {
    await insertPasswordReset(transaction, { id: dependencies.newId(), email, tokenHash: hashToken(token), createdAt: now, expiresAt: new Date(now.getTime() + resetHours * hour) })
    await mailQueue.enqueue(mail, transaction)
  })
}

export async function finishPasswordReset(dependencies: Dependencies, body: OperationBody<typeof completePasswordReset>): Promise<void> {
  const passwordHash = await hashPassword(body.password)
  await dependencies.database.transaction(async transaction => {
    const now = dependencies.clock()
    const taken = await takePasswordReset(transaction, hashToken(body.token), now)
    if (taken === null) throw linkNotValid('Ask for a new one.')
    await updatePassword(transaction, taken.userId, passwordHash)
    await voidPasswordResets(transaction, taken.userId, now)
    await deleteSessions(transaction, taken.userId, null)
    await auditByPerson(dependencies, transaction, taken.userId, { action: 'set a new password' })
  })
}

export async function renamePerson(dependencies: Dependencies, userId: string, displayName: string): Promise<void> {
  await dependencies.database.transaction(async transaction => {
    const before = await findUserById(transaction, userId)
    await updateDisplayName(transaction, userId, displayName)
    await auditByPerson(dependencies, transaction, userId, { action: 'renamed', before: { displayName: before?.displayName }, after: { displayName } })
  })
}

/** Ends the person's other sessions: whoever knew the old password is out. */
export async function changeOwnPassword(
  dependencies: Dependencies,
  change: { userId: string; sessionId: string; currentPassword: string; newPassword: string },
): Promise<void> {
  const found = await findUserById(dependencies.database, change.userId)
  if (!(await passwordMatches(found?.passwordHash ?? null, change.currentPassword))) {
    throw new AppError('wrong-credentials', { detail: 'The current password is not right.', fields: [{ path: 'body.currentPassword', sentence: 'The current password is not right.' }] })
  }
  const passwordHash = await hashPassword(change.newPassword)
  await dependencies.database.transaction(async transaction => {
    await updatePassword(transaction, change.userId, passwordHash)
    await deleteSessions(transaction, change.userId, change.sessionId)
    await auditByPerson(dependencies, transaction, change.userId, { action: 'set a new password' })
  })
}

/** A further shop for somebody who has an account. */
export async function openShop(dependencies: Dependencies, owner: { userId: string }, name: string): Promise<void> {
  await dependencies.database.transaction(async transaction => {
    const shopId = dependencies.newId()
    await insertShopWithOwner(transaction, { shopId, name, ownerId: owner.userId })
    await auditBy(dependencies, transaction, { shopId, userId: owner.userId }, { action: 'created', thing: 'shop', thingId: shopId, after: { name } })
  })
}
